"""Five million indents through a bench's layout, beside the same cells as a tidy table.

Both are read by the package from the list of coupons to the last block of typed readings, each in
a process of its own. The bench file is in a code page, with decimal commas, diagonals in millimetre
and force in kilonewton; the tidy table holds the same numbers. Printed: seconds, peak memory, and
the ratio of CPU times (the machine may be shared), which is to stay under 1.5; then the same with
every diagonal a number of its own, where turning each distinct cell once helps least.

    python tests/benchmarks/bench_layout.py [coupons]
"""

import subprocess
import sys
import tempfile
from dataclasses import dataclass
from pathlib import Path
from typing import Final, cast

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
import pyarrow.csv as pacsv
from numpy.typing import NDArray

INDENTS: Final = 5  # of a coupon
LAYOUT: Final = """
[layout]
id = "bench"
fills = "indents"
[text]
encoding = "cp1252"
delimiter = ";"
decimal = ","
table_starts_after = "READINGS FOLLOW"
[columns]
coupon_id = "piece"
indent_no = "no"
force_n = { from = "load", unit = "kN" }
d1_um = { from = "across", unit = "mm" }
d2_um = { from = "along", unit = "mm" }
edge_mm = "rim"
dwell_s = "held"
operator = "by"
"""
READ: Final = """
import resource, sys, time
from hashlib import sha256
from pathlib import Path
import numpy as np
from coldwork import contracts
from coldwork.inputs.layout import read_layout
from coldwork.intake.coupons import read_coupons
from coldwork.intake.exclusions import no_exclusions
from coldwork.intake.files import TableFiles
from coldwork.intake.readings import read_readings
from coldwork.intake.set_aside import SetAside
folder, name = Path(sys.argv[1]), sys.argv[2]
layouts = (read_layout("bench.toml", folder),) if name.endswith(".txt") else ()
listed = TableFiles(contracts.load("in/coupons"), folder, (folder / "coupons.csv",))
files = TableFiles(contracts.load("in/indents"), folder, (folder / name,), layouts)
started, wall = time.process_time(), time.perf_counter()
coupons = read_coupons(listed, "UTC")
aside = SetAside(len(coupons))
rows, digest, hashing = 0, sha256(), 0.0
for block in read_readings(files, coupons, no_exclusions(), aside, "UTC"):
    before = time.process_time()
    rows += len(block.lines)
    digest.update(np.column_stack([block.floats[name] for name in sorted(block.floats)]).tobytes())
    hashing += time.process_time() - before
took = time.process_time() - started - hashing
wall = time.perf_counter() - wall - hashing
peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
print(took, wall, peak, rows, digest.hexdigest())
"""


@dataclass(frozen=True)
class Spent:
    """What reading a file took, and what came of it."""

    cpu: float
    wall: float
    megabytes: float
    content: list[str]


def main() -> None:
    """Write the files, read each, print the figures."""
    coupons = int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000
    for places, words in ((1, "diagonals to 0.1 um"), (7, "no two diagonals alike")):
        with tempfile.TemporaryDirectory() as scratch:
            folder = Path(scratch)
            write_batch(folder, coupons, places)
            tidy, bench = (read(folder, name) for name in ("indents.csv", "indents.txt"))
            print(f"{coupons * INDENTS} indents, {words}")
            for name, x in (("tidy", tidy), ("bench", bench)):
                print(f"  {name:6s}{x.cpu:8.2f} s CPU {x.wall:8.2f} s wall {x.megabytes:7.0f} MB")
            print(f"  bench over tidy: {bench.cpu / tidy.cpu:.2f} (wanted under 1.5)")
            print(f"  the same to the last bit: {tidy.content == bench.content}")


def write_batch(folder: Path, coupons: int, places: int) -> None:
    """Write the list of coupons, and their indents both ways."""
    rng = np.random.default_rng(7)
    rows = coupons * INDENTS
    ids = pa.array([f"C{i:07d}" for i in range(coupons)])
    pacsv.write_csv(pa.table({"coupon_id": ids}), folder / "coupons.csv")
    hv = np.repeat(70 + 40 * rng.random(coupons), INDENTS) * (1 + 0.01 * rng.standard_normal(rows))
    d = np.sqrt(0.189093 * 98.07 / hv)  # mm
    texts = {
        "across": fixed(d + 0.0003, places + 3),
        "along": fixed(d - 0.0003, places + 3),
        "rim": fixed(2 + 3 * rng.random(rows), 2),
    }
    piece = ids.take(np.repeat(np.arange(coupons), INDENTS))
    number = pa.array(np.tile(np.arange(1, INDENTS + 1), coupons)).cast(pa.string())
    comma = {name: pc.replace_substring(text, ".", ",") for name, text in texts.items()}
    held, by, load = (pa.repeat(word, rows) for word in ("12", "operator-1", "0,09807"))
    bench = pa.table({"piece": piece, "no": number, "load": load, **comma, "held": held, "by": by})
    options = pacsv.WriteOptions(delimiter=";", quoting_style="none")
    with (folder / "indents.txt").open("wb") as file:
        file.write("Prüfstand 2\nREADINGS FOLLOW\n".encode("cp1252"))
        pacsv.write_csv(bench, file, options)
    tidy = pa.table(
        {
            "coupon_id": piece,
            "indent_no": number,
            "force_n": pa.repeat("98.07", rows),
            "d1_um": micrometres(texts["across"]),
            "d2_um": micrometres(texts["along"]),
            "edge_mm": texts["rim"],
            "dwell_s": held,
            "operator": by,
        }
    )
    pacsv.write_csv(tidy, folder / "indents.csv", pacsv.WriteOptions(quoting_style="none"))
    (folder / "bench.toml").write_text(LAYOUT)


def fixed(values: NDArray[np.float64], places: int) -> pa.StringArray:
    """Write numbers below ten with so many decimal places, none left out."""
    units = pa.array(np.round(values * 10**places).astype(np.int64), pa.int64()).cast(pa.string())
    digits = cast("pa.StringArray", pc.utf8_lpad(units, places + 1, "0"))
    return pc.replace_substring_regex(digits, pattern="^(.)", replacement=r"\1.")


def micrometres(millimetres: pa.StringArray) -> pa.StringArray:
    """Move the point of numbers such as 0.1821 by three places, on the text."""
    moved = pc.replace_substring_regex(millimetres, pattern=r"^0\.(...)", replacement=r"\1.")
    return pc.replace_substring_regex(moved, pattern=r"^0+", replacement="")


def read(folder: Path, name: str) -> Spent:
    """Read one file in a process of its own."""
    command = [sys.executable, "-c", READ, str(folder), name]
    ended = subprocess.run(command, capture_output=True, text=True, check=False)
    if ended.returncode:
        sys.exit(ended.stderr)
    took, wall, peak, *content = ended.stdout.split()
    return Spent(float(took), float(wall), float(peak), content)


if __name__ == "__main__":
    main()
