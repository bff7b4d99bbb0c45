"""The picture of a calibration, beside its file."""

from math import isinf
from pathlib import Path
from typing import Final

import numpy as np
from scipy.special import fdtri

from coldwork.jobs.calibrated import Calibrated
from coldwork.plots import save
from coldwork.plots.calibration import Constants, Picture, draw
from coldwork.plots.names import shown
from coldwork.results.calibrations import write_new
from coldwork.statistics.student import student_quantile

__all__ = ["draw_calibration", "picture_of"]

_COVERAGE: Final = 0.95
_TITLES: Final = {
    "taylor": "Flow stress against the root of the dislocation density",
    "hardness": "Indentation pressure against flow stress",
    "hall-petch": "Flow stress against the grain size",
    "heat": "Measured heat against computed stored energy",
    "core-radius": "Core radius from the heat of the recrystallisation peak",
}


def picture_of(found: Calibrated) -> Picture:
    """Give what is drawn of a calibration."""
    points, fit = found.points, found.fit
    freedom = float(fit.degrees_of_freedom) if fit.enlargement > 1.0 else np.inf
    constants = None
    if len(found.constants) > 1:
        first, second = found.constants
        constants = Constants(
            (_label(first.key, first.unit), _label(second.key, second.unit)),
            (first.value, second.value),
            found.covariance,
            _reach2(freedom),
        )
    bad = None if found.bad is None else points.ids.index(found.bad)
    facts = [
        f"Calibration {found.id}",
        f"{len(points.ids)} points",
        f"chi-squared {fit.chi_squared:.3g} over {fit.degrees_of_freedom}"
        f" (probability {fit.probability:.2g}): {fit.verdict}",
    ]
    notes = [
        "Residuals are over their own standard uncertainty; one in twenty lies beyond the outer"
        " lines where all is as stated.",
    ]
    if fit.enlargement > 1.0:
        notes.append(
            f"The uncertainty of the fit is {fit.enlargement:.3g} times what the points state."
        )
    if found.bad is not None:
        notes.append(
            f"The coupon that lies too far off is {shown(found.bad)}; it was not left out."
        )
    return Picture(
        title=_TITLES[found.kind],
        facts=facts,
        notes=notes,
        labels=points.labels,
        x=points.x,
        y=points.y,
        u_x=points.u_x,
        u_y=points.u_y,
        residual=points.residual,
        leverage=points.leverage,
        bad=bad,
        line=points.line,
        line_covariance=points.line_covariance,
        k=float(student_quantile((1.0 + _COVERAGE) / 2.0, np.array([freedom]))[0]),
        constants=constants,
    )


def draw_calibration(found: Calibrated, file: Path) -> None:
    """Draw a calibration beside its file, as SVG and PNG.

    Parameters
    ----------
    found : Calibrated
        The calibration.
    file : Path
        Its file; the pictures have its name and other endings.

    Raises
    ------
    ResultsNotWritten
        If a picture is there already or cannot be written.
    """
    vector, raster = save(draw(picture_of(found)), file.stem)
    write_new(file.with_suffix(".svg"), vector)
    write_new(file.with_suffix(".png"), raster)


def _label(key: str, unit: str) -> str:
    name = key.rpartition(".")[2]
    return f"{name} [{unit}]"


def _reach2(freedom: float) -> float:
    """Square of the radius of an ellipse that holds two constants with the coverage [1]."""
    if isinf(freedom):
        return float(-2.0 * np.log(1.0 - _COVERAGE))
    return float(2.0 * fdtri(2.0, freedom, _COVERAGE))
