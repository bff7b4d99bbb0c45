"""Blocks cut where coupons end: nothing split, nothing twice, nothing lost."""

from collections.abc import Iterator
from itertools import pairwise
from typing import Final

import numpy as np
import pyarrow as pa
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coldwork.intake.readings import ReadingBlock
from coldwork.reduce.readings import Readings, ScatteredCoupons, regrouped, whole_coupons

COUPONS: Final = 6


def blocks(rows: list[tuple[int, int]], cuts: list[int]) -> Iterator[ReadingBlock]:
    """Rows of (coupon, number) in blocks that end at `cuts`; a row's line is its place."""
    edges = [0, *sorted(cuts), len(rows)]
    for begin, end in pairwise(edges):
        part = rows[begin:end]
        yield ReadingBlock(
            file=0,
            lines=np.arange(begin, end, dtype=np.int64),
            coupon=np.array([c for c, _ in part], dtype=np.int32),
            number=np.array([k for _, k in part], dtype=np.int64),
            floats={"hardness": np.arange(begin, end, dtype=np.float64)},
            texts={"scale": pa.array(["HV"] * len(part), pa.string())},
            times=None,
            raw=pa.record_batch({"indent_no": pa.array([str(k) for _, k in part], pa.string())}),
        )


def collected(
    stretches: Iterator[tuple[Readings, Readings]],
) -> tuple[dict[int, list[tuple[int, int]]], list[int]]:
    """By coupon its (number, line) in order, each coupon met once; lines that repeat a number."""
    whole: dict[int, list[tuple[int, int]]] = {}
    again: list[int] = []
    for readings, repeats in stretches:
        here = set(readings.coupon.tolist())
        assert not here & set(whole), "a coupon was split"
        for c, k, line in zip(readings.coupon, readings.number, readings.lines, strict=True):
            whole.setdefault(int(c), []).append((int(k), int(line)))
        assert readings.column("hardness").tolist() == readings.lines.tolist()  # rows stay together
        again += repeats.lines.tolist()
    return whole, again


ROWS: Final = st.lists(st.tuples(st.integers(0, COUPONS - 1), st.integers(0, 4)), max_size=24)


@given(rows=ROWS, data=st.data())
@settings(deadline=None, derandomize=True, max_examples=150)
def test_every_row_comes_out_once(rows: list[tuple[int, int]], data: st.DataObject) -> None:
    cuts = data.draw(st.lists(st.integers(0, len(rows)), max_size=5))
    expected: dict[int, dict[int, int]] = {}
    repeats = []
    for line, (coupon, number) in enumerate(rows):
        first = expected.setdefault(coupon, {})
        if number in first:
            repeats.append(line)  # the later of the two is the one that repeats
        else:
            first[number] = line
    runs = [c for i, (c, _) in enumerate(rows) if i == 0 or rows[i - 1][0] != c]
    scattered = len(runs) != len(set(runs))
    if scattered:
        with pytest.raises(ScatteredCoupons):
            collected(whole_coupons(blocks(rows, cuts), COUPONS))
        found, again = collected(regrouped(blocks(rows, cuts)))
    else:
        found, again = collected(whole_coupons(blocks(rows, cuts), COUPONS))
    assert found == {c: sorted(first.items()) for c, first in expected.items()}
    assert sorted(again) == repeats


def test_blocks_may_differ_in_their_columns() -> None:
    # two files, one without a column: what it lacks is absent, not lost
    def two() -> Iterator[ReadingBlock]:
        first, second = blocks([(0, 1), (0, 2)], [1])
        yield first
        yield ReadingBlock(
            1,
            second.lines,
            second.coupon,
            second.number,
            {"d1_um": np.array([440.0])},
            {"tester": pa.array(["T1"])},
            np.array([5], dtype=np.int64),
            pa.record_batch({"indent_no": pa.array(["2"]), "d1_um": pa.array(["440.0"])}),
        )

    ((readings, _),) = list(whole_coupons(two(), 1))
    assert readings.column("hardness").tolist()[:1] == [0.0]
    assert np.isnan(readings.column("hardness")[1])
    assert np.isnan(readings.column("d1_um")[0])
    assert readings.texts["tester"].to_pylist() == ["", "T1"]
    assert readings.texts["scale"].to_pylist() == ["HV", ""]
    assert readings.times.tolist() == [np.iinfo(np.int64).min, 5]
    assert readings.raw["d1_um"].to_pylist() == [None, "440.0"]
    assert readings.column("unheard_of").shape == (2,)
