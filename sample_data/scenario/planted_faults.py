"""The batches *planted-faults*, the house sheet that most of them build on, and their list.

Together they let every rule and every reason fire at least once, on purpose. A line of
``FAULTS.csv`` names the batch's folder, the coupon, the reading, the rule or reason, and
the file and line where the cause stands. Whatever fires at level error or warning, or
sets a reading aside, is on the list; of what is only information, one line for each rule.
"""

from typing import Final

from scenario import (
    faults_of_branch,
    faults_of_calibration,
    faults_of_checks,
    faults_of_curves,
    faults_of_flow,
    faults_of_grains,
    faults_of_indents,
    faults_of_instruments,
    faults_of_routes,
    faults_of_rows,
    faults_of_size,
    faults_of_temperature,
    faults_of_work,
)
from scenario.tables import Table

__all__ = ["files"]

_HOUSE: Final = """\
# What the copper batches of the shelf have in common.

[batch]
laboratory = "laboratory beside the strip mill"
timezone = "UTC"                     # every time in the tables says its own zone

[material]
name = "copper"
shear_modulus_gpa = { value = 44.0, u = 2.5, source = "house value for this strip" }

[hardening]
law = "constant"
taylor_factor = { value = 3.06, u = 0.15 }
coefficient = { value = 0.30, factor = 1.2 }

[line_energy]
outer_radius = "spacing"

[character]
screw = 0.5
edge = 0.5

[uncertainty]
coverage = 0.95
repeatability = "pooled"
"""


def files() -> dict[str, str | bytes]:
    """Make the batches: path and content of every file."""
    batches = (
        faults_of_rows.batch(),
        faults_of_indents.batch(),
        faults_of_grains.baseline_batch(),
        faults_of_grains.radius_batch(),
        faults_of_flow.batch(),
        faults_of_branch.batch(),
        faults_of_temperature.batch(),
        faults_of_size.batch(),
        faults_of_work.batch(),
        faults_of_calibration.batch(),
        faults_of_checks.batch(),
        faults_of_curves.pulled_batch(),
        faults_of_curves.pressed_batch(),
        faults_of_instruments.batch(),
        faults_of_routes.batch(),
    )
    found: dict[str, str | bytes] = {"planted-faults/house.toml": _HOUSE}
    table = Table(("batch", "coupon_id", "reading_no", "rule_or_reason", "file", "line", "planted"))
    for batch in batches:
        found |= batch.files()
        for fault in batch.faults:
            harmless = "'" if fault.coupon_id[:1] in tuple("=+-@'") else ""
            table.add(
                {
                    "batch": fault.batch,
                    "coupon_id": harmless + fault.coupon_id,
                    "reading_no": fault.reading_no,
                    "rule_or_reason": fault.rule_or_reason,
                    "file": fault.file,
                    "line": str(fault.line),
                    "planted": fault.planted,
                }
            )
    found["planted-faults/FAULTS.csv"] = table.text()
    return found
