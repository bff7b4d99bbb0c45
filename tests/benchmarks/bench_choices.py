"""`compare` with six choices beside plain runs, and an anisotropic line beside an isotropic one.

One process, one batch of a million coupons, CPU times (the machine may be shared). A plain run in
summary and a comparison with six choices both write their tables; what reading and reducing cost
is measured apart and taken off both. The comparison is to cost less than three plain runs without
reading. Then coupons that are reduced already are evaluated once under each elasticity of the
line: the factor of the crystal is computed once and costs nothing per coupon.

    python tests/benchmarks/bench_choices.py [coupons]
"""

import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Final

from million import write_batch  # type: ignore[import-not-found]  # beside this script

from coldwork.inputs.sheet import method_of
from coldwork.inputs.source import read_sheet
from coldwork.jobs.choices import choices_of
from coldwork.jobs.compare import compare, compared
from coldwork.jobs.gather import gather
from coldwork.jobs.run import run

SIX: Final = [
    "line_energy.outer_radius=spacing,half-spacing",
    'character={screw=1.0},{edge=1.0},{mix="uniform"}',
]
ELASTICITY: Final = [
    'line_energy={elasticity="isotropic"},{elasticity="anisotropic",slip_system="{111}<110>"}'
]
WANTED: Final = 3.0  # plain runs without reading, at most


def main() -> None:
    """Measure all of it in turn, print the figures."""
    coupons = int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000
    with tempfile.TemporaryDirectory() as scratch:
        folder, into = Path(scratch) / "batch", Path(scratch) / "out"
        folder.mkdir()
        into.mkdir()
        write_batch(folder, coupons, ["csv"])
        sheet = read_sheet(folder)
        method = method_of(read_sheet(folder), folder)
        gather(method)  # what is imported and cached, is so for all that follows
        reading = spent(lambda: gather(method))
        plain = spent(lambda: run(folder, into, plots=False)) - reading
        six = spent(lambda: compare(folder, SIX, into / "six", plots=False)) - reading
        bare = spent(lambda: compare(folder, SIX)) - reading
        print(f"{coupons} coupons; reading and reducing {reading:.2f} s of CPU, taken off below")
        print(f"a plain run        {plain:7.2f} s")
        print(
            f"six choices        {six:7.2f} s, {six / plain:.2f} plain runs (wanted < {WANTED:g})"
        )
        print(f"  without tables   {bare:7.2f} s, {bare / plain:.2f} plain runs")
        batch, _ = gather(method)
        own, isotropic, anisotropic = choices_of(sheet, method, ELASTICITY)
        compared(batch, [own, anisotropic])
        one = spent(lambda: compared(batch, [own, isotropic]))
        other = spent(lambda: compared(batch, [own, anisotropic]))
        print(f"isotropic line     {one:7.2f} s for two evaluations of reduced coupons")
        print(
            f"anisotropic line   {other:7.2f} s, {1e6 * (other - one) / coupons:+.3f} us a coupon"
        )


def spent(job: Callable[[], object]) -> float:
    """Give the CPU seconds that a job takes, all threads together."""
    started = time.process_time()
    job()
    return time.process_time() - started


if __name__ == "__main__":
    main()
