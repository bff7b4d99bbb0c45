"""How long help takes beside importing pandas, and what a routine batch spends on imports.

python tests/benchmarks/start_up.py [runs]
"""

import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Final

BATCH: Final = Path(__file__).parents[2] / "sample_data" / "copper-strip"
IMPORTS: Final = (
    "import coldwork.jobs.run, coldwork.plots, coldwork.contracts.frames, "
    "matplotlib.backends.backend_agg, matplotlib.backends.backend_svg, pyarrow as pa; pa.array([1])"
)


def main() -> None:
    """Run both in turn and print medians and ratios."""
    runs = int(sys.argv[1]) if len(sys.argv) > 1 else 9
    python = sys.executable
    aid, pandas = in_turn(
        [python, "-m", "coldwork", "--help"], [python, "-c", "import pandas"], runs
    )
    print(
        f"--help {aid:.3f} s, import pandas {pandas:.3f} s, ratio {aid / pandas:.2f} (wanted < 0.6)"
    )
    with tempfile.TemporaryDirectory() as scratch:
        count = iter(range(10_000))
        process = [python, "-m", "coldwork", "process", str(BATCH), "--into"]
        whole, imports = in_turn(
            process, [python, "-c", IMPORTS], max(3, runs // 3), lambda: f"{scratch}/{next(count)}"
        )
    print(
        f"35 coupons with all plots {whole:.2f} s, of which imports {imports:.2f} s: "
        f"{imports / whole:.0%}"
    )


def in_turn(
    first: list[str], second: list[str], runs: int, extra: Callable[[], str] | None = None
) -> tuple[float, float]:
    """Median wall time of two commands run A B A B, after one of each to warm up."""
    spent: tuple[list[float], list[float]] = [], []
    for turn in range(runs + 1):
        for which, command in enumerate((first, second)):
            more = [extra()] if extra and which == 0 else []
            started = time.perf_counter()
            subprocess.run([*command, *more], capture_output=True, check=False)
            if turn:
                spent[which].append(time.perf_counter() - started)
    return statistics.median(spent[0]), statistics.median(spent[1])


if __name__ == "__main__":
    main()
