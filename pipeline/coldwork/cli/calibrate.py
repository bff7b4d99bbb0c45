"""`coldwork calibrate`."""

from pathlib import Path
from typing import Annotated

import typer

from coldwork.cli.numbers import number
from coldwork.cli.reporting import note, reporting, show, show_json

__all__ = ["calibrate"]


def calibrate(
    data: Annotated[Path, typer.Argument(metavar="DATA", help="CSV of paired measurements.")],
    *,
    kind: Annotated[
        str,
        typer.Option(
            metavar="KIND",
            help="taylor: flow stress over density; hardness: pressure over flow stress; "
            "hall-petch: flow stress over grain size; heat: measured heat over stored energy; "
            "core-radius: density and heat of the "
            "recrystallisation peak.",
        ),
    ],
    into: Annotated[Path, typer.Option(metavar="FILE", help="The .toml file to write.")],
    name: Annotated[
        str | None, typer.Option("--id", metavar="ID", help="Its name; the file's without it.")
    ] = None,
    relative_u: Annotated[
        list[str] | None,
        typer.Option(
            metavar="COLUMN=U", help="Relative uncertainty where no cell gives one; repeatable."
        ),
    ] = None,
    material: Annotated[
        str | None, typer.Option(metavar="METAL", help="The metal that it holds for.")
    ] = None,
    scale: Annotated[str, typer.Option(help="Of a hardness: HV, HBW or HK.")] = "HV",
    area: Annotated[str, typer.Option(help="Of its pressure: contact or projected.")] = "contact",
    strain: Annotated[
        float | None,
        typer.Option(
            metavar="EPS", help="Plastic strain of the flow stresses, for hardness.", parser=number
        ),
    ] = None,
    sheet: Annotated[
        Path | None,
        typer.Option(metavar="BATCH", help="Batch folder with the constants, for core-radius."),
    ] = None,
    plot: Annotated[bool, typer.Option(help="Draw it beside the file, as SVG and PNG.")] = True,
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Find constants with their covariance from paired measurements."""
    with reporting():
        from coldwork.jobs.calibrate import calibrate as job
        from coldwork.jobs.calibrated import Options
        from coldwork.jobs.calibrated_plot import draw_calibration
        from coldwork.jobs.options import pair_of

        relative = dict(pair_of(each) for each in relative_u or ())
        options = Options(name or into.stem, kind, relative, material, scale, area, strain, sheet)
        found = job(data, options, into)
        if plot:
            draw_calibration(found, into)
        if json:
            show_json(found.as_json())
        else:
            show(found.text())
        note(f"{into}: written")
