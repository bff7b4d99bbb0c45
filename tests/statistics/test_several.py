"""Corrections for several comparisons, by hand."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.statistics.several import corrected

P = [0.01, 0.04, 0.03, 0.005]


def test_bonferroni_by_hand() -> None:
    assert_allclose(corrected(P, "bonferroni"), [0.04, 0.16, 0.12, 0.02], rtol=1e-14)


def test_holm_by_hand() -> None:
    # Sorted 0.005 0.01 0.03 0.04, times 4 3 2 1: 0.02 0.03 0.06 0.04, and never falling.
    assert_allclose(corrected(P, "holm"), [0.03, 0.06, 0.06, 0.02], rtol=1e-14)


def test_one_comparison_is_left_as_it_is() -> None:
    for correction in ("holm", "bonferroni", "none"):
        assert_allclose(corrected([0.2], correction), [0.2])


def test_none_passes_one() -> None:
    assert corrected([0.9, 0.8], "bonferroni").max() == 1.0
    assert corrected([0.9, 0.8], "holm").max() == 1.0


def test_holm_finds_no_less_than_bonferroni() -> None:
    p = np.random.default_rng(1).random(50) ** 4
    assert (corrected(p, "holm") <= corrected(p, "bonferroni")).all()


def test_refusals() -> None:
    with pytest.raises(InvalidArgument, match="no correction is called 'tukey'"):
        corrected(P, "tukey")
    with pytest.raises(InvalidArgument, match="probabilities"):
        corrected([1.2], "holm")
