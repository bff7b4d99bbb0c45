"""What would settle an undecided coupon: the count decides, and one reading less does not."""

from typing import Final

import numpy as np
import pytest
from scipy.special import ndtr, ndtri

from coldwork.inputs.method import Limit
from coldwork.judge.decisions import CONFORMING, NON_CONFORMING, UNDECIDED, Evidence, decide
from coldwork.judge.settling import Averaging, more_readings, settling_texts

INF, NAN = np.inf, np.nan
FIXED: Final = 0.3  # u that no reading takes away
SCATTER: Final = 4.0  # of one reading


def held(lower: float | None, upper: float | None, rule: str = "guarded") -> Limit:
    at_least = 0.9 if rule == "probability" else None
    most = 0.1 if rule == "simple" else None
    return Limit("w", "stored_energy_j_per_g", lower, upper, rule, "total", at_least, most)


def known(limit: Limit, value: float, count: float) -> tuple[Evidence, Averaging]:
    """A normal quantity whose u is FIXED and SCATTER over the root of the count."""
    part = SCATTER / count**0.5
    y, u = np.array([value]), np.array([np.hypot(FIXED, part)])
    low, high = (NAN if x is None else x for x in (limit.lower, limit.upper))
    no, k = np.zeros(1, dtype=np.bool_), ndtri(0.95)
    found = Evidence(
        y, u, y - k * u, y + k * u, ndtr((y - low) / u), ndtr((y - high) / u), no, no, 0.95
    )
    ones = np.ones(1)
    return found, Averaging(count * ones, part * ones, 0.0 * ones, INF * ones)


@pytest.mark.parametrize(
    ("limit", "value", "outcome"),
    [
        (held(10.0, None), 11.0, CONFORMING),
        (held(10.0, None), 9.0, NON_CONFORMING),
        (held(None, 10.0), 8.7, CONFORMING),
        (held(9.0, 12.0), 10.2, CONFORMING),
        (held(9.0, 12.0), 13.0, NON_CONFORMING),
        (held(10.0, None, "probability"), 10.6, CONFORMING),
        (held(10.0, None, "simple"), 7.1, NON_CONFORMING),
    ],
)
def test_the_count_decides_and_one_less_does_not(limit: Limit, value: float, outcome: int) -> None:
    now, averaging = known(limit, value, 5.0)
    code = decide(limit, now).code
    assert code[0] == UNDECIDED
    more = float(more_readings(limit, now, code, averaging)[0])
    assert more > 1.0
    assert decide(limit, known(limit, value, 5.0 + more)[0]).code[0] == outcome
    assert decide(limit, known(limit, value, 4.0 + more)[0]).code[0] == UNDECIDED


@pytest.mark.parametrize(("value", "none"), [(10.0, True), (10.49, True), (10.5, False)])
def test_none_would_where_what_stays_is_too_much(value: float, none: bool) -> None:
    # 1.645 x 0.3 = 0.4935: nearer than that to the limit, all readings of the world leave it open.
    limit = held(10.0, None)
    now, averaging = known(limit, value, 5.0)
    more = more_readings(limit, now, decide(limit, now).code, averaging)
    assert (more[0] == -1.0) == none


def test_resolution_and_what_is_not_known() -> None:
    limit = held(10.0, None)
    now, averaging = known(limit, 11.0, 5.0)
    code = decide(limit, now).code
    coarse = Averaging(averaging.count, averaging.u, averaging.u, averaging.degrees_of_freedom)
    assert more_readings(limit, now, code, coarse)[0] == -1.0
    unknown = Averaging(averaging.count, NAN * averaging.u, averaging.least, averaging.count)
    assert np.isnan(more_readings(limit, now, code, unknown)[0])
    assert np.isnan(more_readings(limit, now, np.array([CONFORMING], np.int8), averaging)[0])


def test_fewer_degrees_of_freedom_keep_the_ratio_of_k() -> None:
    limit = held(10.0, None)
    now, averaging = known(limit, 11.0, 5.0)
    few = Averaging(averaging.count, averaging.u, averaging.least, np.array([4.0]))
    code = decide(limit, now).code
    more, normal = (more_readings(limit, now, code, each)[0] for each in (few, averaging))
    assert more > normal  # P(t <= k) being the same, a k of Student's lies further in its tail


def test_words() -> None:
    told = settling_texts(np.array([NAN, -1.0, 1.0, 7.0, 2e6])).to_pylist()
    assert told == [
        None,
        "no number of readings",
        "1 more reading",
        "7 more readings",
        "more than 1000 more readings",
    ]
