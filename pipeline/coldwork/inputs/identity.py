"""The batch's own name and its time zone."""

from typing import Final
from zoneinfo import ZoneInfo, available_timezones

from coldwork.inputs.causes import Causes
from coldwork.inputs.words import nearest, shown

__all__ = ["id_fault", "refuse_bad_identity"]

_LONGEST: Final = 120  # characters
_LONGEST_BYTES: Final = 200  # file systems stop at 255, and temporary names are longer
_RESERVED: Final = "replaced"


def refuse_bad_identity(causes: Causes) -> None:
    """Refuse a batch id that cannot name a folder, and a time zone that nobody knows."""
    batch = causes.sheet.tables.get("batch")
    if not isinstance(batch, dict):
        return
    name, zone = batch.get("id"), batch.get("timezone")
    fault = id_fault(name) if isinstance(name, str) else ""
    if fault:
        causes.add(
            ("batch", "id"),
            f"{shown(name)} {fault}",
            "The id names the folder of the results: one path component.",
            "Write one like CS-2026-31.",
        )
    if isinstance(zone, str) and not _is_zone(zone):
        causes.add(
            ("batch", "timezone"),
            f"{shown(zone)} is not a time zone",
            "Zones go by their names in the IANA database.",
            nearest(zone, available_timezones()) if zone else "Write one like Europe/Vienna.",
        )


def id_fault(name: str) -> str:
    """Say why a batch id cannot name a folder, empty if it can."""
    faults = {
        "is empty": not name,
        "has a slash in it": "/" in name or "\\" in name,
        "holds a character that cannot be printed": not name.isprintable(),
        "begins with a dot": name.startswith("."),
        "begins or ends with a space": name != name.strip(),
        "is where replaced results go": name.casefold() == _RESERVED,
        "is too long": len(name) > _LONGEST or len(name.encode()) > _LONGEST_BYTES,
    }
    return next((fault for fault, holds in faults.items() if holds), "")


def _is_zone(name: str) -> bool:
    try:
        ZoneInfo(name)
    except (ValueError, OSError, LookupError):
        return False
    return True
