"""Temperatures of the readings of whole coupons: their mean, and what the rules say of them."""

import numpy as np

from coldwork import units
from coldwork.inputs.method import Method
from coldwork.reduce.marks import Marks
from coldwork.reduce.readings import Readings
from coldwork.reduce.reduced import Reduced
from coldwork.rules import reading as rules
from coldwork.rules.coupon import MIXED_TEMPERATURES

__all__ = ["reduce_temperatures"]


def reduce_temperatures(readings: Readings, method: Method, reduced: Reduced, marks: Marks) -> None:
    """Take the mean temperature of each coupon; that of the sheet where a reading does not say.

    Called when the means of the stretch are filled in: where a strength is brought to the
    reference temperature and readings of a coupon were made at several, it has no mean.

    Parameters
    ----------
    readings : Readings
        Whole coupons.
    method : Method
        The temperature of the test, and whether a strength is brought to the reference.
    reduced : Reduced
        The batch's table; the rows of these coupons are written.
    marks : Marks
        Where findings on these readings and their coupons go.
    """
    starts = readings.starts
    rows = readings.coupon[starts]
    reduced.temperature[rows] = method.test_temperature
    if "temperature_c" not in readings.floats:
        return
    kelvin = units.to_si(readings.column("temperature_c"), "Cel")
    if method.laws.temperature == "none":
        marks.note(rules.TEST_TEMPERATURE, *rules.temperature_outside(kelvin))
        return
    kelvin = np.where(np.isnan(kelvin), method.test_temperature, kelvin)
    count = np.diff(np.append(starts, len(readings)))
    reduced.temperature[rows] = np.add.reduceat(kelvin, starts) / count
    apart = np.maximum.reduceat(kelvin, starts) - np.minimum.reduceat(kelvin, starts)
    bad = rows[apart > (MIXED_TEMPERATURES.limit or 0.0)]
    if bad.size:
        marks.note_coupons(MIXED_TEMPERATURES, bad)
        reduced.mean[bad] = np.nan
        reduced.sd[bad] = np.nan
