"""Curves of a batch: whether they can be read as the sheet says, and read."""

from collections.abc import Sequence
from dataclasses import dataclass

from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.method import Method, Tensile
from coldwork.intake.coupons import Coupons
from coldwork.intake.curve_columns import column_causes, read_columns
from coldwork.intake.exclusions import Exclusions
from coldwork.intake.files import SourceFile, TableFiles
from coldwork.intake.readings import read_readings
from coldwork.intake.sources import table_text
from coldwork.reduce.stream import Byproducts
from coldwork.reduce.tensile import CurveKeep, Curves, reduce_curves

__all__ = ["CurveReading", "check_curves", "read_curves"]


@dataclass(frozen=True)
class CurveReading:
    """How curves are read.

    Attributes
    ----------
    files : TableFiles
        Their files.
    block_bytes : int
        How much is read at once. [byte]
    pictures : bool
        Whether thinned curves are kept for plots.
    keep : CurveKeep or None
        Where all their points are kept, if they are.
    """

    files: TableFiles
    block_bytes: int
    pictures: bool
    keep: CurveKeep | None


def check_curves(files: TableFiles, tensile: Tensile) -> list[Cause]:
    """Say why files of curves cannot be read, as far as headers and the sheet tell.

    Parameters
    ----------
    files : TableFiles
        They.
    tensile : Tensile
        What the sheet says of them.

    Returns
    -------
    list of Cause
        Empty where all is well so far.
    """
    causes = []
    for file, name in enumerate(files.names):
        text = table_text(files, file)
        found = text.header_causes()
        causes += found or column_causes(tensile, _columns(files, file, text.columns), name)
    return causes


def read_curves(
    how: CurveReading,
    method: Method,
    coupons: Coupons,
    exclusions: Exclusions,
    beside: Byproducts,
) -> tuple[Curves, list[SourceFile]]:
    """Read and reduce all curves.

    Parameters
    ----------
    how : CurveReading
        Files, and what is kept.
    method, coupons
        The batch.
    exclusions : Exclusions
        Points that are taken out.
    beside : Byproducts
        Still empty.

    Returns
    -------
    Curves
        A summary of each.
    list of SourceFile
        What was read.

    Raises
    ------
    BatchRefused
        If no coupon has the dimensions that its curve needs, if a file as a whole cannot
        be trusted, or if a curve stands in two files.
    """
    causes = _geometry_causes(how.files, method.tensile, coupons)
    if causes:
        raise BatchRefused(str(method.folder), causes)
    stream = read_readings(
        how.files,
        coupons,
        exclusions,
        beside.set_aside,
        method.timezone,
        block_bytes=how.block_bytes,
        tensile=method.tensile,
    )
    curves = reduce_curves(
        stream, how.files, method, coupons, beside, pictures=how.pictures, keep=how.keep
    )
    causes = [*stream.unmatched(), *curves.causes]
    if causes:
        raise BatchRefused(str(method.folder), causes)
    return curves, stream.sources


def _columns(files: TableFiles, file: int, header: Sequence[str]) -> Sequence[str]:
    """Give our own names of what a file has."""
    layout = files.layout(file)
    return header if layout is None else tuple(layout.raw_columns)


def _geometry_causes(files: TableFiles, tensile: Tensile | None, coupons: Coupons) -> list[Cause]:
    """Refuse curves of force where coupons.csv has no dimensions at all."""
    if tensile is None:
        return []
    headers = []
    for file in range(len(files.paths)):
        text = table_text(files, file)
        text.header_causes()
        headers.append(_columns(files, file, text.columns))
    if not any("force_n" in (read_columns(tensile, columns) or ()) for columns in headers):
        return []
    have = set(coupons.dimensions)
    lacking = [] if "gauge_length_mm" in have else ["gauge_length_mm"]
    if "initial_diameter_mm" not in have and not {"width_mm", "thickness_mm"} <= have:
        lacking.append("initial_diameter_mm, or width_mm with thickness_mm")
    if not lacking:
        return []
    where = ", ".join(dict.fromkeys(source.path for source in coupons.sources))
    what = f"the curves bring forces, and there is no column {' and none of '.join(lacking)}"
    why = "Stress is force over the section before the test, strain is extension over a length."
    return [Cause(where, what, why, "Add the dimensions of the coupons.")]
