"""A calibration's file: constants with their covariance, read and held against its seal."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from hashlib import sha256
from math import inf
from pathlib import Path
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.causes import Causes
from coldwork.inputs.quantity import Input
from coldwork.inputs.source import Sheet, SheetFile, path_fault, read_toml
from coldwork.inputs.structure import refuse_misfits
from coldwork.inputs.words import shown

__all__ = ["SEAL", "Calibration", "Parameter", "read_calibration", "seal_of"]

FloatArray = NDArray[np.float64]

SEAL: Final = "\n[seal]\n"  # what stands above this line is sealed
_WHY: Final = "A calibration is taken as coldwork calibrate wrote it, from data that still say so."
_AGAIN: Final = "Run coldwork calibrate again."


@dataclass(frozen=True)
class Parameter:
    """One constant of a calibration.

    Attributes
    ----------
    key : str
        Dotted key of the sheet that it is for.
    value, u : float
        Value and standard uncertainty. [`unit`]
    unit : str
        UCUM code of the key's unit.
    factor : float or None
        One standard deviation as a factor, where the constant is lognormal. [1]
    """

    key: str
    value: float
    u: float
    unit: str
    factor: float | None = None


@dataclass(frozen=True)
class Calibration:
    """Constants found together, p of them.

    Attributes
    ----------
    id, kind : str
        Its name, and what was held against what.
    path, digest : str
        The file as the sheet names it, and the SHA-256 of its bytes.
    data, data_digest : str
        The measurements: path from the calibration's folder, and SHA-256.
    parameters : tuple of Parameter, p
        In the order of the covariance.
    covariance : ndarray of float64, shape (p, p)
        [products of the parameters' units]
    degrees_of_freedom : float
        Of the uncertainties; infinite where they are those that were stated. [1]
    quantity : str
        Column in which the range is given.
    low, high : float
        Ends of the range. [unit of `quantity`]
    conditions : mapping of str to object
        Dotted keys of a sheet with what they must hold.
    verdict : str
        ``as stated``, ``too bad`` or ``too good``.
    """

    id: str
    kind: str
    path: str
    digest: str
    data: str
    data_digest: str
    parameters: tuple[Parameter, ...]
    covariance: FloatArray
    degrees_of_freedom: float
    quantity: str
    low: float
    high: float
    conditions: Mapping[str, Any] = field(default_factory=dict)
    verdict: str = "as stated"

    @property
    def source(self) -> str:
        """Say where its constants come from, by digest."""
        return f"calibration {self.id}, sha256 {self.digest}"

    def place(self, key: str) -> int | None:
        """Give the place of a key among the parameters, None if it is not there."""
        keys = [parameter.key for parameter in self.parameters]
        return keys.index(key) if key in keys else None

    def components(self) -> dict[str, Input]:
        """Give the independent inputs that the constants' errors are made of.

        Returns
        -------
        dict of str to Input
            ``calibration:ID:1`` to p, each of value 0 and standard uncertainty 1.
        """
        names = [f"calibration:{self.id}:{i + 1}" for i in range(len(self.parameters))]
        return {
            name: Input(
                name,
                0.0,
                1.0,
                "1",
                degrees_of_freedom=self.degrees_of_freedom,
                source=self.source,
                origin="calibration",
            )
            for name in names
        }

    def mix(self, key: str) -> dict[str, float]:
        """Give the sensitivities of a constant to those components.

        Parameters
        ----------
        key : str
            One of its parameters.

        Returns
        -------
        dict of str to float
            A row of the Cholesky factor of the covariance, zeros left out. [the key's unit]
        """
        place = self.place(key)
        if place is None:
            return {}
        row = np.linalg.cholesky(self.covariance)[place]
        names = self.components()
        return {name: float(c) for name, c in zip(names, row, strict=True) if c != 0.0}


def seal_of(text: str) -> str:
    """Give the digest of what stands above a calibration's seal; line ends do not count."""
    return sha256(text.replace("\r\n", "\n").partition(SEAL)[0].encode()).hexdigest()


def read_calibration(path: str, folder: Path) -> Calibration:
    """Read a calibration's file.

    Parameters
    ----------
    path : str
        Path from the batch folder; it may lead to a folder above, as ``builds_on`` does.
    folder : Path
        The batch folder.

    Returns
    -------
    Calibration
        Checked; its seal holds, and so does the digest of its data where those still stand
        beside it.

    Raises
    ------
    BatchRefused
        With everything that is wrong with it.
    """
    fault = path_fault(path)
    if fault:
        why = "A calibration is a .toml file, named from the batch folder."
        cause = Cause(shown(path), fault, why, "Name it like 'calibration.toml'.")
        raise BatchRefused(str(folder), [cause])
    file = read_toml(folder, path, "calibration")
    causes = Causes(Sheet(file.tables, (file,)))
    refuse_misfits(causes, "calibration")
    if not causes.found:
        _refuse_broken_seal(causes, folder / path)
    if not causes.found:
        _refuse_other_data(causes, (folder / path).parent)
        _refuse_bad_covariance(causes)
    if causes.found:
        raise BatchRefused(str(folder), causes.all())
    return _calibration(file)


def _refuse_broken_seal(causes: Causes, path: Path) -> None:
    text = path.read_bytes().decode("utf-8-sig")
    if seal_of(text) != causes.sheet.tables["seal"]["sha256"]:
        what = "the digest does not match: the file has been changed since it was written"
        causes.add(("seal", "sha256"), what, _WHY, _AGAIN)


def _refuse_other_data(causes: Causes, folder: Path) -> None:
    data = causes.sheet.tables["data"]
    try:
        found = sha256((folder / data["path"]).read_bytes()).hexdigest()
    except OSError:
        return  # the data need not travel with it; their digest does
    if found != data["sha256"]:
        what = f"the digest does not match: {data['path']} has been changed since"
        causes.add(("data", "sha256"), what, _WHY, _AGAIN)


def _refuse_bad_covariance(causes: Causes) -> None:
    rows = [parameter["covariance"] for parameter in causes.sheet.tables["parameters"]]
    path = ("parameters", 0, "covariance")
    if any(len(row) != len(rows) for row in rows):
        what = f"there are {len(rows)} parameters and rows of another length"
        causes.add(path, what, _WHY, _AGAIN)
        return
    covariance = np.array(rows, dtype=np.float64)
    size = np.sqrt(np.abs(np.diagonal(covariance)))
    with np.errstate(divide="ignore", invalid="ignore"):
        correlation = covariance / np.outer(size, size)
    good = np.isfinite(correlation).all() and np.array_equal(correlation, correlation.T)
    if not good or np.linalg.eigvalsh(correlation)[0] <= 0.0:
        causes.add(path, "this is no covariance", _WHY, _AGAIN)


def _calibration(file: SheetFile) -> Calibration:
    tables = file.tables
    fit, within, parameters = tables["fit"], tables["range"], tables["parameters"]
    return Calibration(
        id=tables["calibration"]["id"],
        kind=tables["calibration"]["kind"],
        path=file.name,
        digest=file.digest,
        data=tables["data"]["path"],
        data_digest=tables["data"]["sha256"],
        parameters=tuple(
            Parameter(p["key"], float(p["value"]), float(p["u"]), p["unit"], p.get("factor"))
            for p in parameters
        ),
        covariance=np.array([p["covariance"] for p in parameters], dtype=np.float64),
        degrees_of_freedom=float(fit["degrees_of_freedom"]) if fit["enlargement"] > 1.0 else inf,
        quantity=within["quantity"],
        low=float(within["low"]),
        high=float(within["high"]),
        conditions=tables.get("conditions", {}),
        verdict=fit["verdict"],
    )
