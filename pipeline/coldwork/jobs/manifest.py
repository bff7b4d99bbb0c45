"""What came in and that no row was lost: the content of ``manifest.json``, but for the outputs."""

import getpass
import platform
import socket
from contextlib import suppress
from datetime import UTC, datetime
from pathlib import Path

from coldwork import contracts
from coldwork.intake.files import SourceFile
from coldwork.jobs.gather import Gathered

__all__ = ["manifest_of"]


def manifest_of(batch: Gathered, started: datetime) -> dict[str, object]:
    """Give the content of ``manifest.json``.

    Parameters
    ----------
    batch : Gathered
        The batch, worked to its end.
    started : datetime
        When the run began.

    Returns
    -------
    dict
        As the schema of the document has it, without ``outputs`` and ``replaced``.
    """
    method, sources = batch.method, batch.sources
    sheets = [_read_whole(method.folder, *sheet, "sheet") for sheet in method.sheets]
    layouts = [
        _read_whole(method.folder, layout.path, layout.digest, "layout")
        for layout in method.used_layouts
    ]
    user = "unknown"
    with suppress(KeyError, OSError):  # an account without a name
        user = getpass.getuser()
    return {
        "schema_version": contracts.document("manifest")["version"],
        "batch_id": method.batch_id,
        "inputs": [*sheets, *layouts, *(_table(source) for source in sources)],
        "reconciled": {
            "readings_read": batch.readings_read,
            "readings_used": batch.readings_used,
            "readings_set_aside": batch.readings_set_aside,
            "coupons": len(batch.coupons),
        },
        "unused_columns": {s.name: list(s.unused_columns) for s in sources if s.unused_columns},
        "kept_lines": {
            s.name: [{"line": kept.line, "text": kept.text} for kept in s.kept_lines]
            for s in sources
            if s.kept_lines
        },
        "run": {
            "started_at": started.isoformat(),
            "finished_at": datetime.now(UTC).isoformat(),
            "host": socket.gethostname(),
            "user": user,
            "python": platform.python_version(),
            "platform": platform.platform(),
        },
    }


def _read_whole(folder: Path, name: str, digest: str, table: str) -> dict[str, object]:
    """Give the entry of a file that holds no rows."""
    return {
        "path": name,
        "table": table,
        "sha256": digest,
        "bytes": (folder / name).stat().st_size,
        "rows_read": 0,
        "rows_used": 0,
        "rows_set_aside": 0,
    }


def _table(source: SourceFile) -> dict[str, object]:
    entry: dict[str, object] = {
        "path": source.path,
        "table": source.table,
        "sha256": source.sha256,
        "bytes": source.bytes,
        "rows_read": source.rows_read,
        "rows_used": source.rows_used,
        "rows_set_aside": source.rows_set_aside,
    }
    return entry | ({"sheet": source.sheet} if source.sheet else {})
