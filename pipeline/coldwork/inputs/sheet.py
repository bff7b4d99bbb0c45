"""Read ``batch.toml`` into a frozen method, or refuse the batch with every cause at once."""

from dataclasses import replace
from pathlib import Path
from typing import Any, Final

from coldwork.errors import BatchRefused
from coldwork.inputs.both import refuse_bad_both, refuse_two_strains
from coldwork.inputs.calibrated import Calibrations
from coldwork.inputs.causes import Causes
from coldwork.inputs.collect import (
    given_numbers,
    refuse_missing_constants,
    used_numbers,
)
from coldwork.inputs.core import refuse_bad_core
from coldwork.inputs.crystal import crystal_of
from coldwork.inputs.document import method_document
from coldwork.inputs.draws import draws_of, refuse_bad_draws, refuse_draws_beyond_memory
from coldwork.inputs.identity import refuse_bad_identity
from coldwork.inputs.laws import choice, laws_of, refuse_bad_mix
from coldwork.inputs.limits import limits_of, refuse_bad_limits, refuse_bad_testers, testers_of
from coldwork.inputs.metal import Metal, metal_of
from coldwork.inputs.method import Laws, Method
from coldwork.inputs.numbers import Given, as_number, refuse_unreal_numbers
from coldwork.inputs.prior_work import refuse_bad_prior_work
from coldwork.inputs.ranges import refuse_bad_ranges
from coldwork.inputs.size_effect import refuse_bad_size_effect
from coldwork.inputs.source import Sheet, read_sheet
from coldwork.inputs.structure import refuse_misfits
from coldwork.inputs.tables import Tables, tables_of
from coldwork.inputs.temperature import refuse_bad_temperature
from coldwork.inputs.tensile import machine_numbers, refuse_bad_tensile, tensile_of
from coldwork.inputs.unbuilt import refuse_unbuilt
from coldwork.materials import Material
from coldwork.units import to_si

__all__ = ["method_of", "read_method"]

_SPACING: Final = {"edge_distance_d": 3.0, "centre_distance_d": 6.0}  # ISO 6507-1, light metals


def read_method(folder: Path) -> Method:
    """Read a batch folder's sheet.

    Parameters
    ----------
    folder : Path
        The batch folder.

    Returns
    -------
    Method
        Checked and complete; the files that it names exist.

    Raises
    ------
    BatchRefused
        With everything that is wrong with the sheet: where it stands, the rule
        that it breaks, the nearest known name, and how to mend it.
    """
    folder = Path(folder)
    return method_of(read_sheet(folder), folder)


def method_of(sheet: Sheet, folder: Path, *, with_files: bool = True) -> Method:
    """Check a sheet and make its method.

    Parameters
    ----------
    sheet : Sheet
        From `read_sheet`, or made of options.
    folder : Path
        The batch folder.
    with_files : bool, optional
        Whether the files that it names are looked for; the method has none otherwise.

    Returns
    -------
    Method
        Checked and complete.

    Raises
    ------
    BatchRefused
        As `read_method`.
    """
    causes = Causes(sheet)
    refuse_unreal_numbers(causes)
    refuse_unbuilt(causes)
    refuse_bad_size_effect(causes)
    home = folder.resolve()
    calibrations = Calibrations(home)
    given = given_numbers(causes, calibrations)
    metal = metal_of(causes, home)
    material = metal.material
    refuse_bad_identity(causes)
    refuse_misfits(causes)
    if not metal.causes:
        refuse_missing_constants(causes, material)
    refuse_bad_mix(causes)
    refuse_bad_ranges(causes, given)
    refuse_bad_temperature(causes, given, material)
    refuse_bad_prior_work(causes)
    refuse_bad_core(causes, material)
    crystal = crystal_of(causes, given, material)
    refuse_bad_testers(causes)
    refuse_bad_limits(causes)
    refuse_bad_tensile(causes)
    calibrations.refuse_conflicts(causes)
    refuse_bad_draws(causes)
    refuse_bad_both(causes)
    files = tables_of(causes, home) if with_files else Tables()
    inside = [*metal.causes, *calibrations.causes, *files.causes]
    if causes.found or inside:
        raise BatchRefused(str(folder), [*causes.all(), *inside])
    laws = laws_of(sheet.tables, crystal)
    numbers = used_numbers(causes, laws, given, material) | machine_numbers(causes)
    numbers |= calibrations.components()
    method = _method(causes, home, metal, files, numbers, laws)
    taken = calibrations.files()
    method = replace(
        method,
        sheets=(*method.sheets, *((found.path, found.digest) for found in taken)),
        calibrations=taken,
        verification=files.paths.get("verification", ()),
        mixes=calibrations.mixes(),
    )
    refuse_draws_beyond_memory(causes, method)
    refuse_two_strains(causes, method)
    if causes.found:
        raise BatchRefused(str(folder), causes.all())
    return replace(method, document=method_document(method, sheet.tables, numbers))


def _method(
    causes: Causes,
    folder: Path,
    metal: Metal,
    found: Tables,
    numbers: dict[str, Given],
    laws: Laws,
) -> Method:
    sheet, files, material = causes.sheet, found.paths, metal.material
    tables: dict[str, Any] = sheet.tables
    batch = tables["batch"]
    testers = testers_of(tables, sheet.origin(("testers",)))
    inputs = {name: given.input for name, given in numbers.items()}
    inputs |= {tester.bias.name: tester.bias for tester in testers}
    resolution = as_number(choice(tables, "indentation", "resolution_um"))
    return Method(
        folder=folder,
        batch_id=batch["id"],
        laboratory=batch.get("laboratory"),
        operator=batch.get("operator"),
        timezone=choice(tables, "batch", "timezone"),
        material=tables["material"]["name"],
        lattice=tables["material"].get("lattice", material.lattice if material else None),
        edge_distance_d=_spacing(tables, material, "edge_distance_d"),
        centre_distance_d=_spacing(tables, material, "centre_distance_d"),
        coupons=files.get("coupons", ()),
        indents=files.get("indents", ()),
        flow_stress=files.get("flow_stress", ()),
        exclusions=files.get("exclusions", ()),
        laws=laws,
        inputs=inputs,
        testers=testers,
        limits=limits_of(tables),
        plastic_strain=float(choice(tables, "flow", "plastic_strain")),
        repeatability_rel=as_number(choice(tables, "flow", "repeatability_rel")),
        resolution=None if resolution is None else float(to_si(resolution, "um")),
        repeatability=choice(tables, "uncertainty", "repeatability"),
        coverage=float(choice(tables, "uncertainty", "coverage")),
        test_temperature=float(to_si(choice(tables, "temperature", "test_c"), "Cel")),
        reference_temperature=float(to_si(choice(tables, "temperature", "reference_c"), "Cel")),
        tables=tuple(choice(tables, "output", "tables")),
        detail=choice(tables, "output", "detail"),
        sheets=(*sheet.digests, *metal.digests),
        document={},
        curves=files.get("curves", ()),
        tensile=tensile_of(tables),
        draws=draws_of(tables),
        layouts=found.layouts,
        both=tables["strength"]["route"] == "both",
    )


def _spacing(tables: dict[str, Any], material: Material | None, key: str) -> float:
    said = as_number(tables["material"].get(key))
    if said is not None:
        return said
    return material.values[key].value if material else _SPACING[key]
