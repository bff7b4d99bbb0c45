"""Killed or interrupted at any moment: nothing half-written, and the next run works."""

import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Final

import pytest
from typer.testing import Result

import coldwork
from coldwork.results.read import verify

Cw = Callable[..., Result]
Batch = Callable[..., Path]

# Runs the command line with one function of the job stopped at its door; the flag file says so.
STOPPED: Final = """
import sys, time
from importlib import import_module
from pathlib import Path
flag, skip, where, name, *words = sys.argv[1:]
left = int(skip)
place = import_module(where)
for part in name.split(".")[:-1]:
    place = getattr(place, part)
last = name.split(".")[-1]
inner = getattr(place, last)
def stopped(*args, **kwargs):
    global left
    left -= 1
    if left < 0:
        Path(flag).touch()
        time.sleep(60)
    return inner(*args, **kwargs)
setattr(place, last, stopped)
sys.argv = ["coldwork", *words]
from coldwork.cli import main
main()
"""
MOMENTS: Final = [
    ("coldwork.results.target", "Target.commit"),  # every table is written
    ("coldwork.results.target", "Target._publish"),  # all is, but for the move
]


def started(
    out: Path, moment: tuple[str, str], *batches: Path, more: Sequence[str] = (), skip: int = 0
) -> subprocess.Popen[str]:
    """Start a run and give it once it stands at the moment, for the first time after `skip`."""
    flag = out.with_name("flag")
    words = ["process", *map(str, batches), "--into", str(out), "--no-plots", *more]
    job = subprocess.Popen(
        [sys.executable, "-c", STOPPED, str(flag), str(skip), *moment, *words],
        env={**os.environ, "PYTHONPATH": str(Path(coldwork.__file__).parents[1])},
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )
    while not flag.exists():  # it ends by itself, were it never to get there
        assert job.poll() is None, job.communicate()
        time.sleep(0.02)
    flag.unlink()
    return job


@pytest.mark.parametrize("moment", MOMENTS, ids=[name for _, name in MOMENTS])
def test_killed_and_run_again(
    cw: Cw, batch: Batch, tmp_path: Path, moment: tuple[str, str]
) -> None:
    folder, out = batch(), tmp_path / "out"
    job = started(out, moment, folder)
    job.kill()
    job.communicate()
    assert [p for p in out.iterdir() if not p.name.startswith(".")] == []
    assert cw("process", folder, "--into", out, "--no-plots").exit_code == 0
    assert verify(out / "tidy") == []
    assert [p.name for p in out.iterdir()] == ["tidy"]  # what the dead run left is gone


def test_killed_while_it_replaces(cw: Cw, batch: Batch, tmp_path: Path) -> None:
    folder, out = batch(), tmp_path / "out"
    assert cw("process", folder, "--into", out, "--no-plots").exit_code == 0
    old = (out / "tidy" / "manifest.json").read_bytes()
    why = ["--replace", "--reason", "a new bias"]
    job = started(out, MOMENTS[-1], folder, more=why)
    job.kill()
    job.communicate()
    assert (out / "tidy" / "manifest.json").read_bytes() == old
    assert verify(out / "tidy") == []
    assert cw("process", folder, "--into", out, "--no-plots", *why).exit_code == 0
    assert sorted(p.name for p in out.iterdir()) == ["replaced", "tidy"]


@pytest.mark.parametrize(
    ("sent", "moment"),
    [(signal.SIGINT, ("coldwork.jobs.run", "gather")), (signal.SIGTERM, MOMENTS[-1])],
)
def test_interrupted(
    batch: Batch, tmp_path: Path, sent: signal.Signals, moment: tuple[str, str]
) -> None:
    folder, out = batch(), tmp_path / "out"
    job = started(out, moment, folder)
    job.send_signal(sent)
    stdout, stderr = job.communicate(timeout=30)
    assert job.returncode == 130
    assert stdout == ""
    assert "interrupted" in stderr
    assert "Traceback" not in stderr
    assert not out.exists()  # it was made by this run, and nothing is left behind


def test_interrupted_between_batches_keeps_what_is_finished(batch: Batch, tmp_path: Path) -> None:
    first, second, out = batch("first"), batch("second"), tmp_path / "out"
    job = started(out, MOMENTS[0], first, second, skip=1)
    job.send_signal(signal.SIGINT)
    stdout, _ = job.communicate(timeout=30)
    assert job.returncode == 130
    assert stdout.splitlines() == [str(out / "first")]
    assert [p.name for p in out.iterdir()] == ["first"]
    assert verify(out / "first") == []


def test_a_reader_that_has_seen_enough(tmp_path: Path) -> None:
    # as `coldwork contract | head -1`: no traceback, no complaint
    job = subprocess.Popen(
        [sys.executable, "-m", "coldwork", "contract", "out/coupons"],
        env={**os.environ, "PYTHONPATH": str(Path(coldwork.__file__).parents[1])},
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        cwd=tmp_path,
    )
    assert job.stdout is not None
    job.stdout.close()
    assert job.stderr is not None
    assert job.stderr.read() == b""
    job.stderr.close()
    assert job.wait(timeout=30) == 0
