"""Results are written whole or not at all, whatever happens on the way."""

import errno
import hashlib
import json
import os
import resource
import shutil
import signal
import subprocess
import sys
import threading
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pyarrow as pa
import pytest

from coldwork.errors import Exit, ResultsNotWritten
from coldwork.results import disk, staging
from coldwork.results.read import verify
from coldwork.results.target import open_target

TableOf = Callable[..., pa.Table]
Manifest = dict[str, Any]


def write_batch(
    into: Path,
    table_of: TableOf,
    manifest: Manifest,
    *,
    rows: int = 3,
    replace: bool = False,
    reason: str | None = None,
) -> Path:
    with open_target(into, "B-1", replace=replace, reason=reason) as target:
        flags = target.table("flags", ("csv", "parquet"))
        flags.write(table_of("flags", rows, coupon_id=[f"C{i}" for i in range(rows)]))
        flags.close()
        records = target.lines("records.jsonl")
        records.write([b"{}"] * rows)
        records.close()
        target.write("plots/drift.svg", b"<svg/>")
        return target.commit(manifest)


def contents(folder: Path) -> dict[str, bytes]:
    files = (path for path in folder.rglob("*") if path.is_file())
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in files}


def test_everything_stands_in_its_place_and_nothing_else(
    tmp_path: Path, table_of: TableOf, manifest: Manifest
) -> None:
    into = tmp_path / "a" / "results"
    path = write_batch(into, table_of, manifest)
    assert path == into / "B-1"
    assert [p.name for p in into.iterdir()] == ["B-1"]
    files = contents(path)
    written = json.loads(files.pop("manifest.json"))
    assert written["replaced"] is None
    assert {entry["path"] for entry in written["outputs"]} == set(files)
    rows = {"flags.csv": 3, "flags.parquet": 3, "records.jsonl": 3, "plots/drift.svg": None}
    for entry in written["outputs"]:
        data = files[entry["path"]]
        assert entry["sha256"] == hashlib.sha256(data).hexdigest()
        assert entry["bytes"] == len(data)
        assert entry["rows"] == rows[entry["path"]]


def test_the_same_content_is_the_same_bytes(
    tmp_path: Path, table_of: TableOf, manifest: Manifest
) -> None:
    one = write_batch(tmp_path / "one", table_of, manifest)
    other = write_batch(tmp_path / "other", table_of, manifest)
    assert contents(one) == contents(other)


def test_nothing_is_seen_before_the_commit_and_nothing_stays_without_one(tmp_path: Path) -> None:
    into = tmp_path / "new" / "results"
    with open_target(into, "B-1") as target:
        target.write("x.txt", b"x")
        (target.scratch / "kept.arrow").write_bytes(b"x")
        assert not (into / "B-1").exists()
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("error", [ValueError, KeyboardInterrupt, SystemExit])
def test_an_interruption_leaves_nothing_behind(
    tmp_path: Path, table_of: TableOf, error: type[BaseException]
) -> None:
    def interrupted() -> None:
        with open_target(tmp_path / "results", "B-1") as target:
            flags = target.table("flags", ("csv", "parquet"))
            flags.write(table_of("flags", 20_000))
            target.lines("records.jsonl").write([b"{}"])
            raise error

    with pytest.raises(error):
        interrupted()
    assert list(tmp_path.iterdir()) == []


def test_a_folder_of_others_is_never_removed(tmp_path: Path) -> None:
    (tmp_path / "empty").mkdir()
    with open_target(tmp_path / "empty", "B-1"):
        pass
    assert list((tmp_path / "empty").iterdir()) == []


KILLED = """
import sys, time
from pathlib import Path
from coldwork.results.target import open_target
with open_target(Path(sys.argv[1]), "B-1") as target:
    target.lines("records.jsonl").write([b"{}"] * 100_000)
    (target.scratch / "kept.arrow").write_bytes(b"x")
    print("writing", flush=True)
    time.sleep(600)
"""


@pytest.fixture
def writing_process(tmp_path: Path) -> Iterator[subprocess.Popen[str]]:
    """Run another process that is in the middle of writing."""
    command = [sys.executable, "-c", KILLED, str(tmp_path)]
    package = str(Path(disk.__file__).parents[2])
    with subprocess.Popen(
        command, stdout=subprocess.PIPE, text=True, env={**os.environ, "PYTHONPATH": package}
    ) as process:
        assert process.stdout is not None
        assert process.stdout.readline() == "writing\n"
        yield process
        process.kill()


def test_a_killed_run_leaves_no_half_result_and_the_next_one_tidies_up(
    tmp_path: Path,
    table_of: TableOf,
    manifest: Manifest,
    writing_process: subprocess.Popen[str],
) -> None:
    writing_process.send_signal(signal.SIGKILL)
    writing_process.wait()
    left = [p.name for p in tmp_path.iterdir()]
    assert len(left) == 2
    assert all(name.startswith(staging.PREFIX) for name in left)
    write_batch(tmp_path, table_of, manifest)
    assert [p.name for p in tmp_path.iterdir()] == ["B-1"]


def test_a_living_run_is_left_alone(
    tmp_path: Path,
    table_of: TableOf,
    manifest: Manifest,
    writing_process: subprocess.Popen[str],
) -> None:
    write_batch(tmp_path, table_of, manifest)
    assert writing_process.poll() is None
    alive = [p for p in tmp_path.iterdir() if p.is_dir() and p.name.startswith(staging.PREFIX)]
    assert len(alive) == 1
    assert (alive[0] / "results" / "records.jsonl").stat().st_size == 300_000


DYING = """
import os, sys
from pathlib import Path
from coldwork.results.target import open_target
into, call, number = Path(sys.argv[1]), sys.argv[2], int(sys.argv[3])
real, calls = getattr(os, call), []
def dying(*args, **options):
    calls.append(1)
    return os._exit(9) if len(calls) == number else real(*args, **options)
setattr(os, call, dying)
with open_target(into, "B-1", replace=True, reason="better") as target:
    for name in ("who.txt", "plots/a.svg"):
        target.write(name, b"new")
    target.commit({MANIFEST})
"""
MOMENTS = [
    ("mkdir", 1), ("mkdir", 3), ("write", 1), ("write", 3), ("fsync", 2), ("fsync", 5),
    ("rename", 1), ("rename", 2), ("fsync", 7), ("rmdir", 1), ("unlink", 1),
]  # fmt: skip


@pytest.mark.parametrize(("call", "number"), MOMENTS)
def test_a_run_that_dies_at_any_call_loses_nothing(
    tmp_path: Path, table_of: TableOf, manifest: Manifest, *, call: str, number: int
) -> None:
    # The process ends before the n-th call of a function of the system, without any tidying.
    old = contents(write_batch(tmp_path, table_of, manifest))
    script = DYING.replace("{MANIFEST}", repr(manifest))
    done = subprocess.run(
        [sys.executable, "-c", script, str(tmp_path), call, str(number)],
        check=False,
        env={**os.environ, "PYTHONPATH": str(Path(disk.__file__).parents[2])},
    )
    assert done.returncode == 9
    kept = [p for p in tmp_path.rglob("flags.csv") if staging.PREFIX not in str(p)]
    assert len(kept) == 1
    assert contents(kept[0].parent) == old
    if (tmp_path / "B-1").exists():
        assert verify(tmp_path / "B-1") == []
    write_batch(tmp_path, table_of, manifest, replace=True, reason="again")
    assert {p.name for p in tmp_path.iterdir()} == {"B-1", "replaced"}


def test_a_staging_that_is_being_made_is_not_swept(tmp_path: Path) -> None:
    # Between two runs of one process the locks are as apart as between two processes.
    with open_target(tmp_path, "B-1") as one, open_target(tmp_path, "B-2") as other:
        one.write("x", b"1")
        other.write("x", b"2")
        assert staging.sweep(tmp_path) == 0


def test_an_existing_result_stops_a_run_before_it_starts(
    tmp_path: Path, table_of: TableOf, manifest: Manifest
) -> None:
    before = contents(write_batch(tmp_path, table_of, manifest))
    for replace, reason in ((False, None), (False, "new alpha"), (True, None), (True, " ")):
        with pytest.raises(ResultsNotWritten, match=r"B-1: .*exists.*--into.*--reason"):
            open_target(tmp_path, "B-1", replace=replace, reason=reason).__enter__()
    assert contents(tmp_path / "B-1") == before
    assert [p.name for p in tmp_path.iterdir()] == ["B-1"]


def test_an_existing_result_moves_whole_for_a_reason(
    tmp_path: Path, table_of: TableOf, manifest: Manifest
) -> None:
    before = contents(write_batch(tmp_path, table_of, manifest))
    path = write_batch(tmp_path, table_of, manifest, rows=5, replace=True, reason=" new alpha ")
    digest = hashlib.sha256(before["manifest.json"]).hexdigest()
    kept = f"B-1-{digest[:12]}"
    assert contents(tmp_path / "replaced" / kept) == before
    assert json.loads((path / "manifest.json").read_bytes())["replaced"] == {
        "digest": digest,
        "reason": "new alpha",
        "moved_to": f"replaced/{kept}",
    }
    assert sorted(p.name for p in tmp_path.iterdir()) == ["B-1", "replaced"]


def test_a_second_one_of_the_same_name_is_kept_beside_the_first(
    tmp_path: Path, table_of: TableOf, manifest: Manifest
) -> None:
    first = write_batch(tmp_path, table_of, manifest)
    digest = hashlib.sha256((first / "manifest.json").read_bytes()).hexdigest()
    taken = tmp_path / "replaced" / f"B-1-{digest[:12]}"
    taken.mkdir(parents=True)
    write_batch(tmp_path, table_of, manifest, replace=True, reason="again")
    assert list(taken.iterdir()) == []
    assert (taken.parent / f"{taken.name}-2" / "flags.csv").is_file()


def test_replacing_nothing_is_plain_writing(
    tmp_path: Path, table_of: TableOf, manifest: Manifest
) -> None:
    path = write_batch(tmp_path, table_of, manifest, replace=True, reason="first run")
    assert json.loads((path / "manifest.json").read_bytes())["replaced"] is None
    assert [p.name for p in tmp_path.iterdir()] == ["B-1"]


def test_what_is_no_result_is_never_moved(tmp_path: Path) -> None:
    (tmp_path / "B-1").mkdir()
    (tmp_path / "B-1" / "notes.txt").write_text("mine")
    with pytest.raises(ResultsNotWritten, match="no result of coldwork"):
        open_target(tmp_path, "B-1", replace=True, reason="why").__enter__()
    assert (tmp_path / "B-1" / "notes.txt").read_text() == "mine"


def test_the_quicker_of_two_runs_wins_and_the_other_says_so(
    tmp_path: Path, manifest: Manifest
) -> None:
    with open_target(tmp_path, "B-1") as slow:
        slow.write("who.txt", b"slow")
        with open_target(tmp_path, "B-1") as quick:
            quick.write("who.txt", b"quick")
            quick.commit(manifest)
        with pytest.raises(ResultsNotWritten, match="exists"):
            slow.commit(manifest)
    assert (tmp_path / "B-1" / "who.txt").read_bytes() == b"quick"
    assert [p.name for p in tmp_path.iterdir()] == ["B-1"]


@pytest.mark.parametrize("replace", [False, True])
def test_runs_that_commit_together_lose_nothing(
    tmp_path: Path, manifest: Manifest, *, replace: bool
) -> None:
    count = 6
    together = threading.Barrier(count)
    refused = []

    def run(number: int) -> None:
        try:
            with open_target(tmp_path, "B-1", replace=replace, reason="race") as target:
                target.write("who.txt", str(number).encode())
                together.wait()
                target.commit(manifest)
        except ResultsNotWritten:
            refused.append(number)

    threads = [threading.Thread(target=run, args=(number,)) for number in range(count)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    kept = sorted(int(p.read_text()) for p in tmp_path.rglob("who.txt"))
    assert sorted(kept + refused) == list(range(count))
    assert len(refused) == (0 if replace else count - 1)


def test_without_locks_a_rename_still_never_overwrites_a_result(
    tmp_path: Path, manifest: Manifest, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("coldwork.results.target._refuse_existing", lambda *_: None)
    monkeypatch.setattr("coldwork.results.target._Old.found", lambda *_: None)
    for who in (b"first", b"second"):
        try:
            with open_target(tmp_path, "B-1") as target:
                target.write("who.txt", who)
                target.commit(manifest)
        except ResultsNotWritten as error:
            assert "another run" in str(error)  # noqa: PT017
    assert (tmp_path / "B-1" / "who.txt").read_bytes() == b"first"


def test_an_old_result_is_back_in_its_place_when_the_move_fails(
    tmp_path: Path, table_of: TableOf, manifest: Manifest, monkeypatch: pytest.MonkeyPatch
) -> None:
    before = contents(write_batch(tmp_path, table_of, manifest))
    rename = Path.rename

    def failing(self: Path, target: Path) -> Path:
        if self.name == "results":
            raise OSError(errno.EIO, "input/output error")
        return rename(self, target)

    monkeypatch.setattr(Path, "rename", failing)
    with pytest.raises(ResultsNotWritten, match=r"B-1: .*input/output error"):
        write_batch(tmp_path, table_of, manifest, replace=True, reason="why")
    assert contents(tmp_path / "B-1") == before
    assert [p.name for p in tmp_path.iterdir()] == ["B-1"]


@pytest.mark.parametrize(
    "batch_id", ["", ".", "..", "a/b", "a\0b", "replaced", f"{staging.PREFIX}1"]
)
def test_a_name_that_cannot_be_a_folder_here_is_refused(tmp_path: Path, batch_id: str) -> None:
    with pytest.raises(ResultsNotWritten, match="batch id"):
        open_target(tmp_path, batch_id).__enter__()
    assert list(tmp_path.iterdir()) == []


def test_a_name_that_is_too_long_is_one_clear_line(tmp_path: Path) -> None:
    with pytest.raises(ResultsNotWritten, match="too long") as caught:
        open_target(tmp_path, "x" * 300).__enter__()
    assert "\n" not in str(caught.value)
    assert list(tmp_path.iterdir()) == []


def test_hard_names_are_folders(tmp_path: Path, manifest: Manifest) -> None:
    for name in ("NA", "0012", "=7 ä<b>", "-rf", "~"):
        with open_target(tmp_path, name) as target:
            target.commit(manifest)
    assert {p.name for p in tmp_path.iterdir()} == {"NA", "0012", "=7 ä<b>", "-rf", "~"}


# What the file system refuses. Each message is one line that names the path.


def refused_run(into: Path, table_of: TableOf, manifest: Manifest) -> str:
    with pytest.raises(ResultsNotWritten) as caught:
        write_batch(into, table_of, manifest, rows=20_000)
    assert caught.value.exit is Exit.NOT_WRITTEN
    message = str(caught.value)
    assert "\n" not in message
    assert str(into) in message
    return message


def test_a_file_where_a_folder_should_be(
    tmp_path: Path, table_of: TableOf, manifest: Manifest
) -> None:
    (tmp_path / "file").write_text("mine")
    for into in (tmp_path / "file", tmp_path / "file" / "below"):
        assert "a file stands where a folder" in refused_run(into, table_of, manifest)
    assert (tmp_path / "file").read_text() == "mine"


FAILURES = [
    (errno.ENOSPC, "the disk is full"),
    (errno.EDQUOT, "quota"),
    (errno.EROFS, "read-only"),
    (errno.EACCES, "permission denied"),
    (errno.EIO, "Input/output error"),
]


@pytest.mark.parametrize(("number", "words"), FAILURES)
@pytest.mark.parametrize("call", ["mkdir", "open", "write", "fsync"])
def test_any_refusal_is_told_and_leaves_nothing(
    tmp_path: Path,
    table_of: TableOf,
    manifest: Manifest,
    monkeypatch: pytest.MonkeyPatch,
    *,
    call: str,
    number: int,
    words: str,
) -> None:
    into = tmp_path / "results"
    real = getattr(os, call)

    def failing(what: str | int | Path, *args: object, **options: object) -> object:
        path = Path(f"/proc/self/fd/{what}").readlink() if isinstance(what, int) else what
        if str(into) in str(path):
            raise OSError(number, os.strerror(number))
        return real(what, *args, **options)

    with monkeypatch.context() as patch:
        patch.setattr(os, call, failing)
        assert words in refused_run(into, table_of, manifest)
    assert list(tmp_path.iterdir()) == []


LIMITED = """
import resource, sys
from pathlib import Path
from coldwork.errors import ResultsNotWritten
from coldwork.results.target import open_target
resource.setrlimit(resource.RLIMIT_FSIZE, (10_000, 10_000))
try:
    with open_target(Path(sys.argv[1]), "B-1") as target:
        target.lines("records.jsonl").write([b"x" * 99] * 1000)
except ResultsNotWritten as error:
    print(error)
"""


def test_a_file_that_may_not_grow_is_told_and_leaves_nothing(tmp_path: Path) -> None:
    # A real refusal by the kernel, half-way through a write, on any machine.
    assert resource.getrlimit(resource.RLIMIT_FSIZE)
    package = str(Path(disk.__file__).parents[2])
    done = subprocess.run(
        [sys.executable, "-c", LIMITED, str(tmp_path / "results")],
        capture_output=True,
        text=True,
        check=True,
        env={**os.environ, "PYTHONPATH": package},
    )
    assert done.stdout.count("\n") == 1
    assert "records.jsonl: results not written, a file may not grow that large" in done.stdout
    assert list(tmp_path.iterdir()) == []


def test_a_disk_that_is_really_full(tmp_path: Path, table_of: TableOf, manifest: Manifest) -> None:
    # Needs the right to mount; `test_any_refusal_is_told_and_leaves_nothing` covers the rest.
    small = tmp_path / "small"
    small.mkdir()
    mount = shutil.which("mount") or "mount"
    options = ["-t", "tmpfs", "-o", "size=256k", "tmpfs", str(small)]
    if os.geteuid() != 0 or subprocess.run([mount, *options], check=False).returncode:
        pytest.skip("no right to mount a small file system")
    try:
        assert "the disk is full" in refused_run(small, table_of, manifest)
        assert list(small.iterdir()) == []
    finally:
        subprocess.run([shutil.which("umount") or "umount", str(small)], check=True)


def test_a_folder_without_the_right_to_write(
    tmp_path: Path, table_of: TableOf, manifest: Manifest
) -> None:
    # /sys takes no folders from anybody, root included; for others any closed folder does.
    closed = Path("/sys")
    if os.geteuid() != 0:
        closed = tmp_path / "closed"
        closed.mkdir()
        closed.chmod(0o500)
    message = refused_run(closed / "results", table_of, manifest)
    assert "permission denied" in message or "read-only" in message


def test_an_open_table_at_the_commit_is_a_fault_of_ours(
    tmp_path: Path, table_of: TableOf, manifest: Manifest
) -> None:
    with open_target(tmp_path / "r", "B-1") as target:
        target.table("flags").write(table_of("flags", 1))
        with pytest.raises(RuntimeError, match="still open"):
            target.commit(manifest)
    assert list(tmp_path.iterdir()) == []


def test_a_manifest_that_breaks_its_schema_is_not_written(
    tmp_path: Path, manifest: Manifest
) -> None:
    del manifest["run"]
    with (
        pytest.raises(RuntimeError, match=r"manifest .*'run'"),
        open_target(tmp_path / "r", "B-1") as target,
    ):
        target.commit(manifest)
    assert list(tmp_path.iterdir()) == []
