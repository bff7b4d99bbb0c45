"""Curves as plots want them: thinned, with their elastic lines and hardening rates."""

from typing import TYPE_CHECKING

import numpy as np

from coldwork import units
from coldwork.intake.coupons import Coupons
from coldwork.reduce.tensile import Curves

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["curve_frames"]


def curve_frames(curves: Curves, coupons: Coupons) -> "dict[str, pd.DataFrame]":
    """Bring what was kept of the curves into frames.

    Parameters
    ----------
    curves : Curves
        Reduced with pictures.
    coupons : Coupons
        For their names.

    Returns
    -------
    dict of str to DataFrame
        ``curve_lines`` (`coupon_id`, `part`, `strain`, `stress_mpa`), ``curve_slopes``
        (`coupon_id`, `slope_mpa`) and ``curve_rates`` (`coupon_id`, `stress_mpa`,
        `rate_mpa`, `u_mpa`), in the order of ``coupons.csv``.
    """
    import pandas as pd

    lines, slopes, rates = [], [], []
    for i in sorted(curves.summaries):
        summary = curves.summaries[i]
        name, result = str(coupons.ids[i].as_py()), summary.result
        if summary.picture is not None:
            x = summary.picture
            for part, strain, stress in (
                ("whole", x.strain, x.stress),
                ("yield", x.yield_strain, x.yield_stress),
            ):
                mpa = units.from_si(stress, "MPa")
                lines.append(
                    pd.DataFrame(
                        {"coupon_id": name, "part": part, "strain": strain, "stress_mpa": mpa}
                    )
                )
        if result is not None and result.slope is not None:
            slopes.append((name, float(units.from_si(np.float64(result.slope.value), "MPa"))))
        if result is not None and result.rate is not None and summary.trusted:
            columns = {
                "stress_mpa": result.rate.stress,
                "rate_mpa": result.rate.rate,
                "u_mpa": result.rate.u,
            }
            si = {key: units.from_si(x, "MPa") for key, x in columns.items()}
            rates.append(pd.DataFrame({"coupon_id": name, **si}))
    return {
        "curve_lines": pd.concat(lines, ignore_index=True) if lines else pd.DataFrame(),
        "curve_slopes": pd.DataFrame(slopes, columns=["coupon_id", "slope_mpa"]),
        "curve_rates": pd.concat(rates, ignore_index=True) if rates else pd.DataFrame(),
    }
