"""One coupon's chain from raw cell to decision, out of its results.

Full results hold a record of each coupon, sealed by a digest in ``coupons``. For a
summary the coupon is computed again from the source files, which must be the same.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from pathlib import Path
from typing import Any, Final, TypeAlias

import pyarrow as pa
import pyarrow.compute as pc

from coldwork.errors import UsageError
from coldwork.results.account import HEADING, account
from coldwork.results.disk import shown
from coldwork.results.read import blocks, document, genuine_table, sealed_record, sha256_of

__all__ = ["Retrace", "Trace", "trace"]

Retrace: TypeAlias = Callable[[Path, str], Mapping[str, Any]]
"""Takes a batch folder and a coupon id, and computes that coupon's record again."""

_NAMES_COMPARED: Final = 20_000
_NAMES_SHOWN: Final = 3
_NAMES_LISTED: Final = 40  # of a result that is small enough to name all of them


@dataclass(frozen=True)
class Trace:
    """What is known of one coupon.

    Attributes
    ----------
    row : mapping
        Its row of ``coupons``; None where there is no value.
    record : mapping
        Its record.
    method : mapping
        The batch's ``method.json``.
    recomputed : bool
        Whether the record was computed again from the source files.
    """

    row: Mapping[str, Any]
    record: Mapping[str, Any]
    method: Mapping[str, Any]
    recomputed: bool

    def text(self) -> str:
        """Tell it as an account, with numbers rounded for people."""
        told = account(self.row, self.record, self.method)
        if self.recomputed:
            told += "\n\nComputed again for this account from source files that have not changed."
        return told

    def as_json(self) -> dict[str, Any]:
        """Give it for a program: every digit, and the inputs that its steps name."""
        used = {name for step in self.record["steps"] for name in step["from"]}
        inputs = {name: x for name, x in self.method["inputs"].items() if name in used}
        return {
            "heading": HEADING,
            "coupon": dict(self.row),
            "record": dict(self.record),
            "inputs": inputs,
            "recomputed": self.recomputed,
        }


def trace(
    results: Path, coupon: str, *, batch: Path | None = None, retrace: Retrace | None = None
) -> Trace:
    """Follow one coupon from its raw cells to its decision.

    Parameters
    ----------
    results : Path
        The batch's results.
    coupon : str
        Its id.
    batch : Path, optional
        The batch folder; needed where the results are a summary.
    retrace : callable, optional
        Computes the coupon's record from the batch folder; needed there too.

    Returns
    -------
    Trace
        Its row, its record and the method.

    Raises
    ------
    UsageError
        If the folder holds no results or no such coupon, if coupons, decisions, the record or
        the method is not the one that was written, or if a source file of a summary has changed.
    """
    results = Path(results)
    manifest = document(results, "manifest")
    method = document(results, "method")
    genuine_table(results, "decisions")  # a record holds them: they must not say otherwise
    place, row = _find(results, coupon)
    if row["record_sha256"]:
        record = _sealed_record(results, place, row)
        return Trace(row, record, method, recomputed=False)
    if batch is None or retrace is None:
        message = (
            f"{shown(results)}: is a summary, which keeps no records: name the batch folder, "
            "so that the coupon can be computed again from its source files."
        )
        raise UsageError(message)
    _refuse_changed(Path(batch), manifest["inputs"])
    record = dict(retrace(Path(batch), coupon))
    _refuse_different(row, record)
    return Trace(row, record, method, recomputed=True)


def _find(results: Path, coupon: str) -> tuple[int, dict[str, Any]]:
    """Place and row of a coupon in ``coupons``; absent text is None too."""
    start = 0
    seen: list[pa.Array[Any]] = []
    for block in blocks(results, "coupons"):
        ids = block.column("coupon_id")
        place = pc.index(ids, pa.scalar(coupon)).as_py()
        if place >= 0:
            row = block.slice(place, 1).to_pylist()[0]
            return start + place, {name: None if x == "" else x for name, x in row.items()}
        seen.append(ids)
        start += len(ids)
    names = _candidates(seen, coupon)
    near = get_close_matches(coupon, names, n=_NAMES_SHOWN, cutoff=0.5)
    hint = f"The nearest: {', '.join(map(repr, near))}." if near else "No name is near it."
    if not near and start <= _NAMES_LISTED:
        hint = f"There are {', '.join(map(repr, names))}."
    message = f"{shown(results)}: no coupon is called {coupon!r}. {hint}"
    raise UsageError(message)


def _candidates(names: "Sequence[pa.Array[Any]]", coupon: str) -> list[str]:
    """Names worth comparing: all of them, or of very many those that begin alike."""
    count = sum(map(len, names))
    if count > _NAMES_COMPARED:
        start = coupon[: max(1, len(coupon) // 2)]
        names = [some.filter(pc.starts_with(some, start)) for some in names]
    return [str(name) for some in names for name in some.to_pylist()][:_NAMES_COMPARED]


def _sealed_record(results: Path, place: int, row: Mapping[str, Any]) -> dict[str, Any]:
    record = sealed_record(results, place, row["coupon_id"], row["record_sha256"])
    if sha256_of(results / "method.json") != record["method_sha256"]:
        message = (
            f"{shown(results)}: method.json was changed after the record of coupon "
            f"{row['coupon_id']!r} was written. Fetch it from where the results are kept."
        )
        raise UsageError(message)
    return record


def _refuse_changed(batch: Path, inputs: Sequence[Mapping[str, Any]]) -> None:
    problems = []
    for entry in inputs:
        path = batch / entry["path"]
        if not path.is_file():
            problems.append(f"{entry['path']} is missing")
        elif sha256_of(path) != entry["sha256"]:
            problems.append(f"{entry['path']} has changed")
    if problems:
        message = (
            f"{shown(batch)}: is not what these results were made from: {', '.join(problems)}. "
            "Put the files back as they were, or process the batch again."
        )
        raise UsageError(message)


def _refuse_different(row: Mapping[str, Any], record: Mapping[str, Any]) -> None:
    """Refuse a record that another version of the program computes to other numbers."""
    other = [
        name
        for name, quantity in record["quantities"].items()
        if name in row and row[name] != quantity["value"]
    ]
    if other:
        message = (
            f"coupon {row['coupon_id']!r}: computed again from the same files, "
            f"{', '.join(other)} came out differently from the results: another version of "
            "the program wrote them. method.json says which."
        )
        raise UsageError(message)
