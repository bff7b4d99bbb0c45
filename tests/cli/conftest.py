"""Small batches, and the command line run in this process."""

from collections.abc import Callable
from pathlib import Path

import pytest
from typer.testing import CliRunner, Result

from coldwork.cli import app

SHEET = """\
[batch]
id = "{id}"
[material]
name = "copper"
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
baseline_mpa = {{ value = 50.0, u = 5.0 }}
[indentation]
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
[character]
screw = 0.5
edge = 0.5
{limit}
"""
LIMIT = """\
[[limits]]
id = "window"
quantity = "stored_energy_j_per_g"
lower = {}
"""


@pytest.fixture
def batch(tmp_path: Path) -> Callable[..., Path]:
    """Write a batch of two coupons; a limit in J/g, and a bad cell, where they are asked for."""

    def made(batch_id: str = "tidy", *, lower: float | None = None, bad_cell: bool = False) -> Path:
        folder = tmp_path / f"batch-{batch_id}"
        folder.mkdir()
        limit = "" if lower is None else LIMIT.format(lower)
        sheet = SHEET.format(id=batch_id, limit=limit)
        (folder / "batch.toml").write_text(sheet, encoding="utf-8")
        (folder / "coupons.csv").write_text("coupon_id\nA1\nA2\n", encoding="utf-8")
        rows = [
            f"{name},{i},98.07,{hv + i * 0.4}"
            for name, hv in (("A1", 90), ("A2", 96))
            for i in range(1, 6)
        ]
        if bad_cell:
            rows.append("A2,6,98.07,about 97")
        text = "\n".join(["coupon_id,indent_no,force_n,hardness", *rows, ""])
        (folder / "indents.csv").write_text(text, encoding="utf-8")
        return folder

    return made


@pytest.fixture
def cw() -> Callable[..., Result]:
    """Run `coldwork` with words; nothing may look like a traceback."""

    def ran(*words: str | Path, **env: str) -> Result:
        result = CliRunner().invoke(app, [str(word) for word in words], env=env or None)
        assert "Traceback" not in result.output
        assert result.exception is None or isinstance(result.exception, SystemExit)
        return result

    return ran
