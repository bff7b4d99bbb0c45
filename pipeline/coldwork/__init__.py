"""Dislocation density and stored energy of cold work, coupon by coupon.

A batch of hardness indents or flow curves comes in, checked; every coupon
leaves with its dislocation density, its stored energy in dislocations, their
uncertainty, flags, a decision and a record that leads back to the raw cell.

>>> import coldwork
>>> results = coldwork.process("sample_data/copper-strip")  # doctest: +SKIP
>>> results.frames["coupons"][["coupon_id", "stored_energy_j_per_g"]]  # doctest: +SKIP
"""

from importlib import import_module
from typing import TYPE_CHECKING, Any, Final

if TYPE_CHECKING:
    from coldwork.jobs.check import check
    from coldwork.jobs.estimate import estimate
    from coldwork.jobs.process import process
    from coldwork.results.read import read_results

__all__ = ["__version__", "check", "estimate", "process", "read_results"]

__version__ = "0.1.0"

_HOME: Final = {
    "check": "coldwork.jobs.check",
    "estimate": "coldwork.jobs.estimate",
    "process": "coldwork.jobs.process",
    "read_results": "coldwork.results.read",
}


def __getattr__(name: str) -> Any:  # noqa: ANN401 - a function of any of the jobs
    """Import a job when it is first asked for: the scientific stack takes its time."""
    if name not in _HOME:
        message = f"module 'coldwork' has no attribute {name!r}"
        raise AttributeError(message)
    return getattr(import_module(_HOME[name]), name)
