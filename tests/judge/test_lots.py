"""A lot is as good as its worst coupon."""

import numpy as np

from coldwork.judge.decisions import CONFORMING, NON_CONFORMING, NONE, UNDECIDED
from coldwork.judge.lots import lot_decision


def test_the_worst_coupon_decides_for_the_lot() -> None:
    c, n, u = CONFORMING, NON_CONFORMING, UNDECIDED
    lot = np.array([0, 0, 1, 1, 2, 2, 3, 3, 4])
    code = np.array([c, c, c, u, u, n, NONE, c, NONE], dtype=np.int8)
    found = lot_decision(lot, 6, code)
    assert found.code.tolist() == [c, u, n, c, NONE, NONE]
    assert found.conforming.tolist() == [2, 1, 0, 1, 0, 0]
    assert found.undecided.tolist() == [0, 1, 1, 0, 0, 0]
    assert found.non_conforming.tolist() == [0, 0, 1, 0, 0, 0]


def test_no_coupons_and_no_lots() -> None:
    found = lot_decision(np.empty(0, dtype=np.int64), 0, np.empty(0, dtype=np.int8))
    assert found.code.shape == (0,)
