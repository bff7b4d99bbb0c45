"""The reason of a decision: one plain sentence that a person can check."""

from dataclasses import replace

import numpy as np
import pytest

from coldwork.inputs.method import Limit
from coldwork.judge.decisions import Evidence, decide

NAN = np.nan


def limit(rule: str = "guarded", basis: str = "total", **ends: float) -> Limit:
    lower, upper = ends.get("lower"), ends.get("upper")
    return Limit("a", "stored_energy_j_per_g", lower, upper, rule, basis, 0.95, 0.1)


def evidence(value: float, low: float, high: float, u: float = 0.021, p: float = NAN) -> Evidence:
    no = np.array([False])
    return Evidence(
        value=np.array([value]),
        u=np.array([u]),
        lower_bound=np.array([low]),
        upper_bound=np.array([high]),
        above_lower=np.array([p]),
        above_upper=np.array([0.0]),
        blocked=no,
        with_indent=no,
        coverage=0.95,
        unit="J/g",
    )


@pytest.mark.parametrize(
    ("held", "found", "sentence"),
    [
        (
            limit(lower=0.1),
            evidence(0.2, 0.1654, 0.2345),
            "the lower bound 0.165 is not below the lower limit 0.1 J/g",
        ),
        (
            limit(upper=0.3),
            evidence(0.2, 0.1654, 0.2345),
            "the upper bound 0.234 is not above the upper limit 0.3 J/g",
        ),
        (
            limit(lower=0.1, upper=0.3),
            evidence(0.2, 0.1654, 0.2344),
            "the bounds 0.165 and 0.234 lie within the limits 0.1 and 0.3 J/g",
        ),
        (
            limit(lower=0.1, upper=0.3),
            evidence(0.05, 0.0154, 0.0844),
            "the upper bound 0.084 is below the lower limit 0.1 J/g",
        ),
        (
            limit(lower=0.1, upper=0.3),
            evidence(0.4, 0.3654, 0.4344),
            "the lower bound 0.365 is above the upper limit 0.3 J/g",
        ),
        (
            limit(lower=0.1, upper=0.3),
            evidence(0.12, 0.0854, 0.1544),
            "the range from 0.085 to 0.154 is not clear of the lower limit 0.1 J/g",
        ),
        (
            limit(lower=0.1, upper=0.3),
            evidence(0.2, 0.0854, 0.3144),
            "the range from 0.085 to 0.314 is not clear of the limits 0.1 and 0.3 J/g",
        ),
        (
            limit(upper=0.3),
            evidence(0.2, 0.0854, NAN),
            "the range from 0.085 upward is not clear of the upper limit 0.3 J/g",
        ),
        (
            limit(lower=0.1),
            evidence(0.2, NAN, 0.3144),
            "the range up to 0.314 is not clear of the lower limit 0.1 J/g",
        ),
        (
            limit(lower=0.1),
            evidence(NAN, 0.0, 0.3144, u=NAN),
            "there is no value, and the range from 0 to 0.3144 is not clear of the lower limit"
            " 0.1 J/g",
        ),
        (
            limit(lower=0.1),
            evidence(NAN, NAN, NAN, u=NAN),
            "no bounds are known to hold against the lower limit 0.1 J/g",
        ),
        (
            limit(lower=0.1),
            evidence(0.2, NAN, NAN, u=NAN),
            "the value 0.2000 has no known uncertainty to decide with",
        ),
        (
            limit("probability", lower=0.1),
            evidence(0.2, NAN, NAN, p=0.98768),
            "the probability of conforming, 0.9877, reaches 0.95",
        ),
        (
            limit("probability", lower=0.1),
            evidence(0.2, NAN, NAN, p=0.012),
            "the probability of conforming, 0.0120, is not above 0.05",
        ),
        (
            limit("probability", lower=0.1),
            evidence(0.2, NAN, NAN, p=0.5),
            "the probability of conforming, 0.5000, lies between 0.05 and 0.95",
        ),
        (
            limit("probability", lower=0.1),
            evidence(0.2, NAN, NAN),
            "the probability of conforming is not known",
        ),
        (
            limit("simple", lower=0.1, upper=0.3),
            evidence(0.2, NAN, NAN, u=0.012),
            "the value 0.200 lies within the limits 0.1 and 0.3 J/g",
        ),
        (
            limit("simple", lower=0.1),
            evidence(0.2, NAN, NAN, u=0.012),
            "the value 0.200 is not below the lower limit 0.1 J/g",
        ),
        (
            limit("simple", lower=0.1, upper=0.3),
            evidence(0.08, NAN, NAN, u=0.002),
            "the value 0.0800 is below the lower limit 0.1 J/g",
        ),
        (
            limit("simple", upper=0.3),
            evidence(0.4, NAN, NAN, u=0.002),
            "the value 0.4000 is above the upper limit 0.3 J/g",
        ),
        (
            limit("simple", upper=0.3),
            evidence(0.2, NAN, NAN, u=0.03),
            "the relative uncertainty 0.1500 is above the 0.1 that is allowed",
        ),
        (
            limit("simple", upper=0.3),
            evidence(0.0, NAN, NAN, u=0.03),
            "the relative uncertainty of a value of 0 is above the 0.1 that is allowed",
        ),
    ],
)
def test_the_sentence(held: Limit, found: Evidence, sentence: str) -> None:
    assert decide(held, found).reason.to_pylist() == [sentence]


def test_it_says_what_the_state_includes_and_on_which_basis() -> None:
    found = replace(evidence(0.2, 0.1654, 0.2344), with_indent=np.array([True]))
    held = limit(basis="own", lower=0.1)
    assert decide(held, found).reason.to_pylist() == [
        "the lower bound 0.165 is not below the lower limit 0.1 J/g; the state includes the"
        " indent's own strain; shared inputs are taken as exact"
    ]
    assert decide(limit(lower=0.1), found).reason[0].as_py().endswith("the indent's own strain")
    plain = evidence(0.2, 0.1654, 0.2344)
    assert decide(held, plain).reason[0].as_py().endswith("J/g; shared inputs are taken as exact")


def test_an_error_is_named_as_such() -> None:
    found = replace(evidence(0.2, 0.1654, 0.2344), blocked=np.array([True]))
    reason = decide(limit(lower=0.1), found).reason.to_pylist()
    assert reason == ["an error leaves this quantity empty, see the flags"]


def test_a_bound_close_to_its_limit_shows_the_digits_that_tell_them_apart() -> None:
    # 0.0996 would be written 0.100 beside u = 0.021.
    found = evidence(0.2, 0.0996, 0.5)
    assert "from 0.0996 to" in decide(limit(lower=0.1), found).reason[0].as_py()


def test_a_unit_of_one_is_not_written() -> None:
    found = replace(evidence(0.2, 0.1654, 0.5), unit="1")
    assert decide(limit(lower=0.1), found).reason[0].as_py().endswith("limit 0.1")
