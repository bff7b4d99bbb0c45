"""Printed means and scatters against ours: independent statistics, and what rounding allows."""

import statistics

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coldwork.intake.closing import ClosingLine, Tally

CELLS = st.lists(st.integers(1000, 9999), min_size=2, max_size=40)


def line(holds: tuple[str, ...], cell: str) -> ClosingLine:
    return ClosingLine(20, "", holds, {"d1_um": cell}, {"d1_um": cell})


def tally(cells: list[str], split: int = 0) -> Tally:
    made = Tally()
    for part in (cells[:split], cells[split:]):
        made.add("d1_um", np.array([float(cell) for cell in part]), part)
    return made


@settings(deadline=None)
@given(CELLS, st.integers(0, 40), st.integers(0, 4))
def test_what_the_machine_rounds_itself_always_agrees(
    tenths: list[int], split: int, places: int
) -> None:
    # The truth has more digits than the cells: the machine prints from it, we read the cells.
    truth = [each / 10 + 0.04 * (-1) ** place for place, each in enumerate(tenths)]
    cells = [f"{each / 10:.1f}" for each in tenths]
    made = tally(cells, split)
    for name, value in (
        ("mean", statistics.fmean(truth)),
        ("standard-deviation", statistics.stdev(truth)),
        ("range", max(truth) - min(truth)),
    ):
        assert made.disagreements(line((name,), f"{value:.{places}f}")) == []


@pytest.mark.parametrize(
    ("holds", "cell", "agrees"),
    [
        (("mean",), "182.0", True),
        (("mean",), "182.1", True),  # each is known to 0.05
        (("mean",), "182.2", False),
        (("mean",), "182", True),
        (("mean",), "183", False),
        (("mean",), "182.06", False),
        (("mean",), "1.82e2", True),
        (("standard-deviation",), "1.0", True),
        (("standard-deviation",), "1.2", False),
        (("range",), "2.0", True),
        (("range",), "2.3", False),
        (("standard-deviation", "range"), "2.0", True),  # one of the two
        (("standard-deviation", "range"), "3.0", False),
        ((), "7", True),  # not said what it holds: kept, and not compared
    ],
)
def test_it_disagrees_beyond_its_rounding(
    holds: tuple[str, ...],
    cell: str,
    agrees: bool,
) -> None:
    # 181.0, 182.0, 183.0: mean 182, standard deviation 1, range 2
    found = tally(["181.0", "182.0", "183.0"], 1).disagreements(line(holds, cell))
    assert (not found) == agrees


def test_it_says_both_numbers() -> None:
    (found,) = tally(["181.0", "183.0"]).disagreements(line(("mean",), "185"))
    assert (found.printed, found.ours, found.line, found.column) == (185.0, 182.0, 20, "d1_um")
    assert found.limit == pytest.approx(0.55)
    assert "mean of d1_um: printed 185" in found.words
    assert "the 2 rows give 182" in found.words


def test_cells_that_are_no_numbers_do_not_count() -> None:
    made = Tally()
    made.add("d1_um", np.array([181.0, np.nan, 183.0]), ["181.0", "", "183.0"])
    assert made.disagreements(line(("mean",), "182.0")) == []
    assert made.disagreements(ClosingLine(1, "", ("mean",), {"x_mm": "5"}, {"x_mm": "5"})) == []


def test_one_reading_has_no_scatter() -> None:
    assert tally(["181.0"]).disagreements(line(("standard-deviation",), "0.0")) == []
    (found,) = tally(["181.0"]).disagreements(line(("standard-deviation",), "0.3"))
    assert found.ours == 0.0
