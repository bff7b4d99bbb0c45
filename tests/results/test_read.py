"""Results read back: the same values, the same names, and digests that can be checked."""

import hashlib
import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from coldwork import contracts
from coldwork.contracts.frames import check
from coldwork.errors import UsageError
from coldwork.results.read import read_results, read_table, verify
from coldwork.results.target import open_target

TableOf = Callable[..., pa.Table]
NAMES = ["=7/A ä<b>", "NA", "0012", "nan", "-1", "1e3", "null"]


def record_of(name: str) -> bytes:
    return json.dumps({"coupon_id": name}).encode()


def signed(folder: Path, name: str) -> None:
    """Make a file the one that the manifest knows."""
    manifest = json.loads((folder / "manifest.json").read_bytes())
    data = (folder / name).read_bytes()
    (entry,) = (x for x in manifest["outputs"] if x["path"] == name)
    entry["sha256"] = hashlib.sha256(data).hexdigest()
    (folder / "manifest.json").write_text(json.dumps(manifest))


def write(into: Path, manifest: dict[str, Any], forms: tuple[str, ...], **tables: pa.Table) -> Path:
    with open_target(into, "B-1") as target:
        for name, table in tables.items():
            writer = target.table(name, forms)
            writer.write(table)
            writer.close()
        records = target.lines("records.jsonl")
        records.write([record_of(name) for name in NAMES])
        records.close()
        target.write("method.json", b"{}")
        return target.commit(manifest)


@pytest.fixture
def coupons(table_of: TableOf) -> pa.Table:
    n = len(NAMES)
    hardness = np.array([81.3, np.nan, 1 / 3, 5e-324, 1.7e308, 1e22, 97.0])
    seals = [hashlib.sha256(record_of(name)).hexdigest() for name in NAMES]
    return table_of(
        "coupons", n, coupon_id=NAMES, lot_id=NAMES[::-1], hardness=hardness, record_sha256=seals
    )


@pytest.mark.parametrize("forms", [("csv",), ("parquet",), ("csv", "parquet")])
def test_frames_hold_what_was_written(
    tmp_path: Path, manifest: dict[str, Any], coupons: pa.Table, forms: tuple[str, ...]
) -> None:
    results = read_results(write(tmp_path, manifest, forms, coupons=coupons))
    assert list(results.frames) == ["coupons"]
    assert len(results.frames) == 1
    frame = results.frames["coupons"]
    assert results.frames["coupons"] is frame  # read once
    assert check(contracts.load("out/coupons"), frame) == []
    assert frame["coupon_id"].tolist() == NAMES
    assert frame["lot_id"].tolist() == NAMES[::-1]
    np.testing.assert_array_equal(frame["hardness"], coupons["hardness"].to_numpy())
    assert frame["readings_used"].dtype == np.int64
    assert (frame["flags"] == "").all()
    assert results.manifest["batch_id"] == "B-1"
    with pytest.raises(KeyError):
        results.frames["quantities"]


def test_records_are_found_by_name(
    tmp_path: Path, manifest: dict[str, Any], coupons: pa.Table
) -> None:
    results = read_results(write(tmp_path, manifest, ("csv",), coupons=coupons))
    for name in NAMES:
        assert results.record(name) == {"coupon_id": name}
    with pytest.raises(UsageError, match="no coupon is called '12'"):
        results.record("12")
    path = results.folder / "records.jsonl"
    path.write_bytes(path.read_bytes().replace(b"0012", b"0013"))
    with pytest.raises(UsageError, match=r"records\.jsonl: the record of coupon '0012' is not"):
        results.record("0012")
    path.unlink()
    with pytest.raises(UsageError, match="holds no record"):
        results.record("0012")


def test_a_table_that_was_edited_is_not_served(
    tmp_path: Path, manifest: dict[str, Any], coupons: pa.Table
) -> None:
    folder = write(tmp_path, manifest, ("csv", "parquet"), coupons=coupons)
    path = folder / "coupons.csv"
    path.write_bytes(path.read_bytes().replace(b"81.3", b"81.4"))
    with pytest.raises(UsageError, match=r"coupons\.csv: was changed .* Fetch the results"):
        read_results(folder).frames["coupons"]
    path.rename(folder / "lots.csv")
    with pytest.raises(UsageError, match=r"lots\.csv: is not in the manifest"):
        read_table(folder, "lots")
    (folder / "method.json").write_text('{"laws": {}}')
    with pytest.raises(UsageError, match=r"method\.json: was changed after it was written"):
        read_results(folder)


def test_untouched_results_verify(
    tmp_path: Path, manifest: dict[str, Any], coupons: pa.Table
) -> None:
    assert verify(write(tmp_path, manifest, ("csv", "parquet"), coupons=coupons)) == []


def test_every_touch_is_found(tmp_path: Path, manifest: dict[str, Any], coupons: pa.Table) -> None:
    folder = write(tmp_path, manifest, ("csv", "parquet"), coupons=coupons)
    path = folder / "coupons.csv"
    path.write_bytes(path.read_bytes().replace(b"81.3", b"81.4"))
    (folder / "method.json").unlink()
    (folder / "plots").mkdir()
    (folder / "plots" / "mine.svg").write_text("x")
    assert verify(folder) == [
        "coupons.csv: was changed after it was written",
        "method.json: is missing",
        "plots/mine.svg: is not in the manifest",
    ]


def test_a_folder_without_results_is_told(tmp_path: Path) -> None:
    for read in (read_results, verify):
        with pytest.raises(UsageError, match="no results are here"):
            read(tmp_path)
    (tmp_path / "manifest.json").write_text("[]")
    with pytest.raises(UsageError, match="is no document"):
        read_results(tmp_path)


def test_a_table_that_lost_its_columns_is_told(
    tmp_path: Path, manifest: dict[str, Any], coupons: pa.Table
) -> None:
    folder = write(tmp_path, manifest, ("csv",), coupons=coupons)
    (folder / "coupons.csv").write_text("coupon_id,hardness\nA,many\n")
    signed(folder, "coupons.csv")
    with pytest.raises(UsageError, match=r"coupons\.csv: does not follow its contract"):
        read_table(folder, "coupons")
    with pytest.raises(UsageError, match="have no table lots"):
        read_table(folder, "lots")


def test_columns_that_a_later_version_adds_are_passed_over(
    tmp_path: Path, manifest: dict[str, Any], coupons: pa.Table
) -> None:
    folder = write(tmp_path, manifest, ("csv",), coupons=coupons)
    path = folder / "coupons.csv"
    lines = path.read_text().splitlines()
    path.write_text("\n".join(f"{line},{i if i else 'more'}" for i, line in enumerate(lines)))
    signed(folder, "coupons.csv")
    table = read_table(folder, "coupons")
    assert tuple(table.column_names) == contracts.load("out/coupons").columns
    assert table["coupon_id"].to_pylist() == NAMES


printable = st.characters(codec="utf-8", categories=["L", "M", "N", "P", "S", "Zs"])
names = st.lists(st.text(printable, min_size=1, max_size=20), unique=True, min_size=1, max_size=8)


@settings(
    suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=20, deadline=None
)
@given(names=names)
def test_any_printable_name_comes_back_from_both_forms(
    tmp_path_factory: pytest.TempPathFactory,
    manifest: dict[str, Any],
    table_of: TableOf,
    names: list[str],
) -> None:
    table = table_of("coupons", len(names), coupon_id=names)
    for form in ("csv", "parquet"):
        into = tmp_path_factory.mktemp("names")
        back = read_table(write(into, manifest, (form,), coupons=table), "coupons")
        assert back["coupon_id"].to_pylist() == names
