"""The main job for Python: a batch folder in, frames out."""

from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING, Any

from coldwork.jobs.run import Outcome, run
from coldwork.results.read import read_results

if TYPE_CHECKING:
    from collections.abc import Mapping

    import pandas as pd

__all__ = ["Processed", "process"]


@dataclass(frozen=True)
class Processed:
    """A processed batch.

    Attributes
    ----------
    outcome : Outcome
        Counts, and where the results stand, if they were to be kept.
    frames : mapping of str to pandas.DataFrame
        The published tables by name, in the columns and units of their contracts.
    method, manifest : dict
        ``method.json`` and ``manifest.json``.
    """

    outcome: Outcome
    frames: "Mapping[str, pd.DataFrame]"
    method: dict[str, Any]
    manifest: dict[str, Any]


def process(
    batch: str | Path,
    into: str | Path | None = None,
    *,
    replace: bool = False,
    reason: str | None = None,
    plots: bool = False,
) -> Processed:
    """Process a batch folder.

    Parameters
    ----------
    batch : str or Path
        The batch folder, with its ``batch.toml``.
    into : str or Path, optional
        Folder of all results; without one nothing stays on the disk.
    replace : bool, optional
        Whether an existing result may move to ``replaced/``.
    reason : str, optional
        Why; required with `replace`.
    plots : bool, optional
        Whether plots are drawn into the results; without `into` there are none.

    Returns
    -------
    Processed
        The published tables as frames, with what they were made by.

    Raises
    ------
    BatchRefused
        If the batch cannot be trusted as a whole.
    ResultsNotWritten
        If the results cannot be written.
    """
    if into is not None:
        outcome = run(Path(batch), Path(into), replace=replace, reason=reason, plots=plots)
        return _read(outcome)
    with TemporaryDirectory(prefix="coldwork-") as scratch:
        return _read(run(Path(batch), Path(scratch), plots=False))


def _read(outcome: Outcome) -> Processed:
    results = read_results(outcome.path)
    frames = {name: results.frames[name] for name in results.frames}  # all read now
    return Processed(outcome, frames, results.method, results.manifest)
