"""Write the sample batches: ``python sample_data/generate.py [folder]``.

The scenario is invented; no works, no laboratory and no person of it exists, and
persons are roles. A small strip mill rolls copper for heat exchangers. Its coils
are annealed between passes, and the furnace wants to know beforehand how much the
cold work has stored. The laboratory next to the mill cuts coupons after each pass
and indents them: that is *copper-strip*, with the furnace's file and a schedule beside
it; and since its benches do not write tidy tables, the same indents stand once more in
*copper-benches*, as each bench would have left them.
The same copper is pulled too, and the puller's own files are *copper-tension*.
Twelve of its strips were looked at in foils: *copper-calibration*.
A wire shop in the same yard draws
low-carbon rod and pulls pieces of each size: that is *steel-wire*. And the
laboratory keeps a shelf of records with everything in them that has ever gone
wrong, to try its procedures on: *planted-faults*, with a list of what was planted
where in ``FAULTS.csv``.

All numbers come out of fixed seeds and of laws that stand in ``scenario/metal.py``,
so that the truth behind each coupon is known; it lies beside the batch in
``truth.csv``, which no batch sheet names. The same bytes come out every time.
Nothing here imports the package that the batches are for: a truth that was computed
by the code under test would be none.
"""

import sys
from pathlib import Path

from scenario import (
    copper_benches,
    copper_calibration,
    copper_furnace,
    copper_strip,
    copper_tension,
    copper_workbook,
    planted_faults,
    steel_wire,
)

__all__ = ["batches", "main"]


def batches() -> dict[str, str | bytes]:
    """Make every file of the sample data: path below the folder, and content."""
    return {
        **copper_strip.files(),
        **copper_furnace.files(),
        **copper_benches.files(),
        **copper_workbook.files(),
        **copper_tension.files(),
        **copper_calibration.files(),
        **steel_wire.files(),
        **planted_faults.files(),
    }


def main(arguments: list[str]) -> int:
    """Write them below the folder that is named, or beside this script."""
    folder = Path(arguments[0]) if arguments else Path(__file__).resolve().parent
    files = batches()
    for name, content in files.items():
        path = folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content if isinstance(content, bytes) else content.encode("utf-8"))
    print(f"{len(files)} files written below {folder}")
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
