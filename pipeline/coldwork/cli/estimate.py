"""`coldwork estimate`."""

from pathlib import Path
from typing import Annotated

import typer

from coldwork.cli.numbers import number
from coldwork.cli.reporting import note, reporting, show, show_json
from coldwork.errors import Exit

__all__ = ["estimate"]


def estimate(
    material: Annotated[
        str | None, typer.Argument(metavar="[METAL]", help="A metal of the library.")
    ] = None,
    *,
    density: Annotated[
        float | None,
        typer.Option(metavar="RHO", help="Dislocation density in 1/m2.", parser=number),
    ] = None,
    stress: Annotated[
        float | None,
        typer.Option(metavar="MPA", help="Flow stress in MPa.", parser=number),
    ] = None,
    hardness: Annotated[
        float | None,
        typer.Option(metavar="NUMBER", help="Hardness number.", parser=number),
    ] = None,
    u: Annotated[
        float | None,
        typer.Option(
            "--u", help="Standard uncertainty of what is given; exact without it.", parser=number
        ),
    ] = None,
    scale: Annotated[str, typer.Option(help="HV, HBW or HK.")] = "HV",
    force: Annotated[
        float | None,
        typer.Option(metavar="N", help="For HBW, and a size effect.", parser=number),
    ] = None,
    ball: Annotated[
        float | None,
        typer.Option(metavar="MM", help="For HBW.", parser=number),
    ] = None,
    baseline: Annotated[
        float | None,
        typer.Option(metavar="MPA", help="Baseline stress in MPa.", parser=number),
    ] = None,
    u_baseline: Annotated[
        float | None,
        typer.Option(metavar="MPA", help="And its uncertainty; 0 unless said.", parser=number),
    ] = None,
    volume: Annotated[
        float | None,
        typer.Option(
            "--volume",
            metavar="MM3",
            help="Length of line and energy in a volume too.",
            parser=number,
        ),
    ] = None,
    sheet: Annotated[
        Path | None, typer.Option(metavar="BATCH", help="Take all constants from a batch's sheet.")
    ] = None,
    settings: Annotated[
        list[str] | None,
        typer.Option("--set", metavar="KEY=VALUE", help="Any key of a sheet, as TOML; repeatable."),
    ] = None,
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Estimate stored energy from one density, flow stress or hardness."""
    with reporting():
        from coldwork.jobs.estimate import estimate as job

        given = list(settings or ())
        if baseline is None and u_baseline is not None:
            note("--u-baseline goes with --baseline")
            raise typer.Exit(Exit.USAGE)
        if baseline is not None and density is not None:
            note("--baseline belongs to a stress or a hardness: from a density nothing hangs on it")
            raise typer.Exit(Exit.USAGE)
        if baseline is not None:
            numbers = f"value = {float(baseline)}, u = {float(u_baseline or 0.0)}"
            given.insert(0, f"strength.baseline_mpa = {{ {numbers} }}")
        found = job(
            material,
            density_per_m2=density,
            stress_mpa=stress,
            hardness=hardness,
            u=u,
            scale=scale,
            force_n=force,
            ball_mm=ball,
            volume_mm3=volume,
            sheet=sheet,
            settings=given,
        )
        if json:
            show_json(found.as_json())
        else:
            show(found.text())
