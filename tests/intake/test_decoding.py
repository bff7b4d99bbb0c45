"""Encodings: as declared, or refused with the place and the other reading."""

from pathlib import Path

import pytest

from coldwork.intake.decoding import Decoder
from coldwork.intake.files import LineReader

TEXT = "Prüfling: 5 µm\r\nzweite Zeile – ende\r\n"


def read(folder: Path, data: bytes, encoding: str, block_bytes: int = 7) -> tuple[str, list[str]]:
    path = folder / "f.txt"
    path.write_bytes(data)
    reader = LineReader(path, "f.txt", block_bytes, Decoder(encoding, "f.txt"))
    text = b"".join(lines.data for lines in reader).decode("utf-8")
    return text, [str(cause) for cause in reader.causes]


@pytest.mark.parametrize(
    ("encoding", "codec", "mark"),
    [
        ("utf-8", "utf-8", b""),
        ("utf-8", "utf-8", b"\xef\xbb\xbf"),
        ("utf-16", "utf-16-le", b"\xff\xfe"),
        ("utf-16", "utf-16-be", b"\xfe\xff"),
        ("utf-16-le", "utf-16-le", b""),
        ("utf-16-le", "utf-16-le", b"\xff\xfe"),
        ("utf-16-be", "utf-16-be", b""),
        ("cp1252", "cp1252", b""),
        ("cp1250", "cp1250", b""),
        ("mac-roman", "mac_roman", b""),
        ("gb18030", "gb18030", b""),
    ],
)
@pytest.mark.parametrize("block_bytes", [3, 7, 1 << 20])
def test_reads_what_is_declared(
    tmp_path: Path, encoding: str, codec: str, mark: bytes, block_bytes: int
) -> None:
    text = TEXT if encoding != "cp1250" else TEXT.replace("µ", "u")
    found, causes = read(tmp_path, mark + text.encode(codec), encoding, block_bytes)
    assert causes == []
    assert found == text.replace("\r\n", "\n")


@pytest.mark.parametrize(
    ("encoding", "codec", "text"),
    [
        ("latin-1", "latin-1", "Prüfling 5 µm\n"),
        ("latin-9", "iso8859-15", "Prüfling 5 €\n"),
        ("cp1251", "cp1251", "Образец 5\n"),
        ("cp437", "cp437", "Prüfling ½\n"),
        ("cp850", "cp850", "Prüfling ×\n"),
        ("shift_jis", "shift_jis", "試験片 5\n"),
        ("cp932", "cp932", "試験片 ①\n"),
        ("euc_jp", "euc_jp", "試験片\n"),
        ("big5", "big5", "試片\n"),
        ("euc_kr", "euc_kr", "시험편\n"),
        ("ascii", "ascii", "piece\n"),
    ],
)
def test_reads_other_code_pages(tmp_path: Path, encoding: str, codec: str, text: str) -> None:
    assert read(tmp_path, text.encode(codec), encoding) == (text, [])


@pytest.mark.parametrize(
    ("data", "encoding", "words"),
    [
        (b"a\nb\xfc", "ascii", ("f.txt, line 2", "byte 3 (0xfc) is no ascii")),
        (b"a\nb\xfc\n", "utf-8", ("f.txt, line 2", "byte 3 (0xfc) is no utf-8")),
        (b"a\r\nb\x81", "cp1252", ("f.txt, line 2", "byte 4 (0x81) is no cp1252")),
        (b"a\n\x81", "shift_jis", ("f.txt, line 2", "byte 2 (0x81) is no shift_jis")),
        (b"a\x00\n\x00b", "utf-16-le", ("f.txt, line 2", "byte 4")),
        (b"\xff\xfea\x00\xd8", "utf-16", ("f.txt, line 1", "byte 4")),
        (b"\xef\xbb\xbfa", "cp1252", ("byte order mark of utf-8", "cp1252", "'utf-8'")),
        (b"\xef\xbb\xbfa", "utf-16", ("byte order mark of utf-8", "utf-16")),
        (b"\xff\xfea\x00", "cp1252", ("byte order mark of utf-16-le", "'utf-16-le'")),
        (b"\xff\xfea\x00", "utf-8", ("byte order mark of utf-16-le",)),
        (b"\xfe\xff\x00a", "utf-16-le", ("byte order mark of utf-16-be",)),
        (b"a\x00b\x00", "utf-16", ("no byte order mark", "utf-16-le reads", "utf-16-be reads")),
        (
            b"a\n\xc3\xa4rger\n",
            "cp1252",
            ("f.txt, line 2", "valid UTF-8", "Ã¤rger' in cp1252", "ärger' in UTF-8"),
        ),
        (b"\xc3\xa4", "latin-1", ("f.txt, line 1", "valid UTF-8")),
        (b"a\n5 \x96 6\n", "latin-1", ("f.txt, line 2", "0x96", "'–' in cp1252")),
        (b"a\x00b", "cp1252", ("holds a NUL", "line 1")),
    ],
)
@pytest.mark.parametrize("block_bytes", [3, 1 << 20])
def test_refuses_what_is_not_or_may_be_something_else(
    tmp_path: Path, data: bytes, encoding: str, words: tuple[str, ...], block_bytes: int
) -> None:
    _, causes = read(tmp_path, data, encoding, block_bytes)
    assert len(causes) == 1
    assert [word for word in words if word not in causes[0]] == []


@pytest.mark.parametrize("block_bytes", [1, 2, 5, 1 << 20])
def test_one_byte_that_no_utf_8_has_settles_a_code_page(tmp_path: Path, block_bytes: int) -> None:
    text = "Ã¤ and \xfc\n"  # begins like UTF-8 and goes on unlike it
    assert read(tmp_path, text.encode("cp1252"), "cp1252", block_bytes) == (text, [])


def test_a_character_that_is_broken_off_at_a_line_end_is_no_utf_8(tmp_path: Path) -> None:
    text = "Ã\nabc\n"
    assert read(tmp_path, text.encode("cp1252"), "cp1252", 2) == (text, [])
