"""Stretches of readings as the reduction gets them, made from columns."""

from collections.abc import Callable, Mapping, Sequence

import numpy as np
import pyarrow as pa
import pytest

from coldwork.reduce.readings import Readings

ABSENT = np.iinfo(np.int64).min


@pytest.fixture
def stretch() -> Callable[..., Readings]:
    """Make readings: coupons by place, numbers in columns, texts by name, times in us."""

    def made(
        coupon: Sequence[int],
        columns: Mapping[str, Sequence[float]],
        *,
        texts: Mapping[str, Sequence[str]] | None = None,
        times: Sequence[int] | None = None,
    ) -> Readings:
        n = len(coupon)
        return Readings(
            coupon=np.array(coupon, dtype=np.int32),
            number=np.arange(n, dtype=np.int64),
            file=np.zeros(n, dtype=np.int64),
            lines=np.arange(2, n + 2, dtype=np.int64),
            floats={name: np.array(x, dtype=np.float64) for name, x in columns.items()},
            texts={name: pa.array(x, pa.string()) for name, x in (texts or {}).items()},
            times=np.full(n, ABSENT) if times is None else np.array(times, dtype=np.int64),
            raw=pa.table({"reading_no": [str(i) for i in range(n)]}),
        )

    return made
