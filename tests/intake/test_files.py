"""Bytes of a file: whole lines, digests, and what is no text table."""

import os
from hashlib import sha256
from pathlib import Path

import pytest

from coldwork.intake import files
from coldwork.intake.files import LineReader

BLOCKS = [1, 7, 64, 4096, 2 << 20]


def written(folder: Path, content: bytes) -> Path:
    path = folder / "table.csv"
    path.write_bytes(content)
    return path


def read(path: Path, block_bytes: int) -> tuple[LineReader, bytes]:
    reader = LineReader(path, "table.csv", block_bytes)
    return reader, b"".join(lines.data for lines in reader)


@pytest.mark.parametrize("block_bytes", BLOCKS)
@pytest.mark.parametrize(
    ("content", "text"),
    [
        (b"a,b\n1,2\n", b"a,b\n1,2\n"),
        (b"a,b\n1,2", b"a,b\n1,2"),
        (b"a,b\r\n1,2\r\n", b"a,b\n1,2\n"),
        (b"a,b\r1,2\r", b"a,b\n1,2\n"),
        (b"a,b\r\r\n1,2\n\r", b"a,b\n\n1,2\n\n"),
        (b"\xef\xbb\xbfa,b\n1,2\n", b"a,b\n1,2\n"),
        ("ä,ß\n𝛼,\ufeff\n".encode(), "ä,ß\n𝛼,\ufeff\n".encode()),
        (b"", b""),
    ],
)
def test_gives_the_lines_ended_by_line_feeds(
    tmp_path: Path, content: bytes, text: bytes, block_bytes: int
) -> None:
    reader, found = read(written(tmp_path, content), block_bytes)
    assert found == text
    assert reader.causes == []
    assert reader.sha256 == sha256(content).hexdigest()
    assert reader.size == len(content)


@pytest.mark.parametrize("block_bytes", [8, 64, 4096])
@pytest.mark.parametrize("end", [b"\n", b"\r\n", b"\r"])
def test_numbers_lines_from_one(tmp_path: Path, end: bytes, block_bytes: int) -> None:
    content = end.join(b"line %d" % number for number in range(1, 200))
    reader = LineReader(written(tmp_path, content), "table.csv", block_bytes)
    for lines in reader:
        assert lines.data.startswith(b"line %d\n" % lines.first) or lines.first == 199
        assert lines.lines == len(lines.data.removesuffix(b"\n").split(b"\n"))


@pytest.mark.parametrize("block_bytes", [5, 64, 4096])
@pytest.mark.parametrize("end", [b"\n", b"\r\n", b"\r"])
@pytest.mark.parametrize("bom", [b"", b"\xef\xbb\xbf"])
def test_says_where_bytes_are_no_text(
    tmp_path: Path, bom: bytes, end: bytes, block_bytes: int
) -> None:
    head = bom + b"a,b" + end + "µ,1".encode() + end + b"x"
    content = head + b"\0,\xff" + end + b"\xfe\0" + end
    reader, _ = read(written(tmp_path, content), block_bytes)
    whats = [cause.what for cause in reader.causes]
    assert sorted(whats) == [
        f"holds a NUL byte at byte {len(head)} (line 3)",
        f"is not UTF-8 at byte {len(head) + 2} (line 3)",
    ]
    assert {cause.where for cause in reader.causes} == {"table.csv"}


@pytest.mark.parametrize("encoding", ["utf-16-le", "utf-16-be"])
def test_knows_utf_16_by_its_mark(tmp_path: Path, encoding: str) -> None:
    content = "\ufeffcoupon_id\nA\n".encode(encoding)
    reader, found = read(written(tmp_path, content), 64)
    assert found == b""
    assert len(reader.causes) == 1
    assert "UTF-16" in reader.causes[0].what


def test_a_character_cut_by_a_block_is_whole(tmp_path: Path) -> None:
    content = ("ä𝛼" * 100 + "\n").encode() * 3
    for block_bytes in range(1, 20):
        reader, found = read(written(tmp_path, content), block_bytes)
        assert found == content
        assert not reader.causes


def test_a_missing_file_a_folder_and_one_without_permission(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    reader, _ = read(tmp_path / "nowhere.csv", 64)
    assert reader.causes[0].what == "does not exist"
    reader, _ = read(tmp_path, 64)
    assert reader.causes[0].what == "is no file"

    def refuse(*_: object, **__: object) -> None:
        raise PermissionError(13, "Permission denied")

    path = written(tmp_path, b"a\n")
    monkeypatch.setattr(Path, "open", refuse)
    reader, _ = read(path, 64)
    assert reader.causes[0].what == "cannot be read (Permission denied)"


def test_a_line_without_end_is_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(files, "LONGEST_LINE", 1000)
    reader, found = read(written(tmp_path, b"a,b\n" + b"x" * 2000), 64)
    assert found == b"a,b\n"
    assert "holds a line of more than" in reader.causes[0].what


def test_a_file_that_grows_while_it_is_read_is_noticed(tmp_path: Path) -> None:
    path = written(tmp_path, b"a,b\n" * 100)
    reader = LineReader(path, "table.csv", 64)
    for number, _ in enumerate(reader):
        if number == 0:
            with path.open("ab") as file:
                file.write(b"c,d\n" * 100)
    # Read to the new end, the bytes agree with what is there now; else they must not pass.
    if reader.causes:
        assert reader.causes[0].what == "changed while it was read"
    else:
        assert reader.sha256 == sha256(path.read_bytes()).hexdigest()


def test_a_file_that_changes_behind_the_reader_is_noticed(tmp_path: Path) -> None:
    path = written(tmp_path, b"a,b\n" * 100)
    reader = LineReader(path, "table.csv", 64)
    for number, _ in enumerate(reader):
        if number == 3:
            with path.open("r+b") as file:
                file.write(b"X")
            os.utime(path, ns=(1, 1))  # clocks tick too coarsely for so quick a test
    assert [cause.what for cause in reader.causes] == ["changed while it was read"]


def test_a_file_that_is_only_touched_is_the_same(tmp_path: Path) -> None:
    path = written(tmp_path, b"a,b\n" * 100)
    reader = LineReader(path, "table.csv", 64)
    for number, _ in enumerate(reader):
        if number == 3:
            os.utime(path, ns=(1, 1))
    assert reader.causes == []


def test_a_file_replaced_by_another_is_noticed(tmp_path: Path) -> None:
    path = written(tmp_path, b"a,b\n" * 100)
    other = tmp_path / "other.csv"
    other.write_bytes(b"a,c\n" * 100)
    reader = LineReader(path, "table.csv", 64)
    for number, _ in enumerate(reader):
        if number == 3:
            other.replace(path)
    assert [cause.what for cause in reader.causes] == ["changed while it was read"]
