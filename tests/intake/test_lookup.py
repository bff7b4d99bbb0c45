"""Coupons found by name: the quick way and the slow way find the same."""

import pyarrow as pa
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coldwork.intake.lookup import Lookup

IDS = [f"C-{number}" for number in range(12)]


@settings(deadline=None, max_examples=200)
@given(
    st.lists(
        st.lists(st.sampled_from([*IDS, "C-1 ", "c-1", "", "nobody"]), max_size=15), max_size=6
    )
)
def test_finds_what_a_search_finds(blocks: list[list[str]]) -> None:
    lookup = Lookup(pa.array(IDS, pa.string()))
    for block in blocks:
        expected = [IDS.index(name) if name in IDS else -1 for name in block]
        assert lookup.find(pa.array(block, pa.string())).tolist() == expected


@pytest.mark.parametrize("size", [1, 2, 3, 5, 100])
def test_names_in_order_need_no_dictionary(size: int) -> None:
    lookup = Lookup(pa.array(IDS, pa.string()))
    names = [name for name in IDS for _ in range(5)]
    found: list[int] = []
    for start in range(0, len(names), size):
        found += lookup.find(pa.array(names[start : start + size], pa.string())).tolist()
    assert found == [number // 5 for number in range(60)]
    assert lookup._places is None


def test_offers_a_name_that_is_alike() -> None:
    lookup = Lookup(pa.array(["0012", "Strip A", "B"], pa.string()))
    assert lookup.alike("12") == "0012"
    assert lookup.alike(" strip  a ") == "Strip A"
    assert lookup.alike("C") is None


def test_no_coupons() -> None:
    lookup = Lookup(pa.array([], pa.string()))
    assert lookup.find(pa.array(["A"])).tolist() == [-1]
