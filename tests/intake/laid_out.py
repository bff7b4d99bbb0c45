"""A folder with a layout, two coupons and one file of indents, and what comes of reading it."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

from coldwork import contracts
from coldwork.errors import BatchRefused
from coldwork.inputs.layout import read_layout
from coldwork.intake.coupons import read_coupons
from coldwork.intake.exclusions import no_exclusions
from coldwork.intake.files import SourceFile, TableFiles
from coldwork.intake.printed import Printed
from coldwork.intake.readings import read_readings
from coldwork.intake.set_aside import SetAside

COUPONS: Final = ("A", "B", "0012")
LAYOUT: Final = """
[layout]
id = "bench"
fills = "indents"
[text]
encoding = "cp1252"
delimiter = ";"
decimal = ","
thousands = "."
comment = "#"
table_starts_after = "READINGS FOLLOW"
units_line = true
ends_before = ["average", "spread"]
absent = ["", "---"]
times = "%d.%m.%Y %H:%M"
[above]
coupon_id = "piece:"
operator = "by:"
[columns]
force_n = { from = "weight", unit = "kgf" }
d1_um = { from = "across", unit = "mm" }
d2_um = { from = "along", unit = "mm" }
x_mm = "right"
measured_at = "when"
[constants]
scale = "HV"
"""
"""Like the one that the issue draws: labels above, a units line, averages below."""


@dataclass(frozen=True)
class Read:
    """What came of a file: the readings that can be used, and those set aside."""

    rows: list[dict[str, Any]]
    aside: list[dict[str, Any]]
    source: SourceFile
    printed: list[Printed]


def table(
    folder: Path, contents: Mapping[str, bytes], layout: str = LAYOUT, fills: str = "indents"
) -> TableFiles:
    """Write a layout and files, and give them as the files of one table."""
    (folder / "layout.toml").write_text(layout, encoding="utf-8")
    paths = []
    for name, content in contents.items():
        (folder / name).write_bytes(content)
        paths.append(folder / name)
    made = read_layout("layout.toml", folder)
    return TableFiles(contracts.load(f"in/{fills}"), folder, tuple(paths), (made,) * len(paths))


def read(
    folder: Path,
    content: bytes | Mapping[str, bytes],
    layout: str = LAYOUT,
    *,
    block_bytes: int = 2 << 20,
) -> Read:
    """Read files of indents through a layout, to their end."""
    named = {"f.txt": content} if isinstance(content, bytes) else content
    files = table(folder, named, layout)
    (folder / "coupons.csv").write_text("\n".join(("coupon_id", *COUPONS, "")))
    listed = TableFiles(contracts.load("in/coupons"), folder, (folder / "coupons.csv",))
    coupons = read_coupons(listed, "UTC")
    aside = SetAside(len(coupons))
    stream = read_readings(files, coupons, no_exclusions(), aside, "UTC", block_bytes=block_bytes)
    rows = []
    for block in stream:
        for place in range(len(block.lines)):
            row: dict[str, Any] = {
                "coupon": COUPONS[block.coupon[place]],
                "number": int(block.number[place]),
                "line": int(block.lines[place]),
                "raw": {k: v for k, v in block.raw.slice(place, 1).to_pylist()[0].items() if v},
            }
            row |= {name: float(values[place]) for name, values in block.floats.items()}
            row |= {name: str(texts[place].as_py()) for name, texts in block.texts.items()}
            rows.append(row)
    source = stream.sources[0]
    assert source.rows_read == source.rows_used + source.rows_set_aside
    return Read(rows, aside.table().to_pylist(), source, list(stream.printed))


def refusal(folder: Path, content: bytes, layout: str = LAYOUT, **more: Any) -> list[str]:  # noqa: ANN401
    """Read a file that is refused and give its causes as text."""
    try:
        read(folder, content, layout, **more)
    except BatchRefused as refused:
        return [str(cause) for cause in refused.causes]
    return []
