"""The main job for Python: a batch folder in, frames out."""

from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

from coldwork.jobs.run import run
from coldwork.results.read import Results, read_results

__all__ = ["process"]
