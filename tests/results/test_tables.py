"""Tables on disk: by their contracts, in both forms, written beside the caller's work."""

import csv
import errno
import hashlib
import os
import threading
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from itertools import pairwise
from pathlib import Path

import numpy as np
import pyarrow as pa
import pyarrow.parquet as pq
import pytest

from coldwork import contracts
from coldwork.errors import ResultsNotWritten
from coldwork.results.read import read_table
from coldwork.results.tables import TableWriter, arrow_schema

TableOf = Callable[..., pa.Table]
BOTH = ("csv", "parquet")


def written(
    folder: Path, name: str, slices: list[pa.Table], forms: tuple[str, ...] = BOTH
) -> TableWriter:
    folder.mkdir(parents=True, exist_ok=True)
    with ThreadPoolExecutor(2) as pool:
        writer = TableWriter(folder, name, forms, pool)
        try:
            for piece in slices:
                writer.write(piece)
            writer.close()
        finally:
            writer.abandon()
    return writer


def test_both_forms_hold_the_same(tmp_path: Path, table_of: TableOf) -> None:
    table = table_of(
        "flags",
        3,
        coupon_id=["=7/A ä<b>", "NA", "0012"],
        reading_no=[1, None, 3],
        value=[0.1, float("nan"), -0.0],
        detail=["a, b", 'say "no"', "'tis"],
    )
    writer = written(tmp_path, "flags", [table])
    assert writer.rows == 3
    for output in writer.outputs:
        data = (tmp_path / output.path).read_bytes()
        assert (output.sha256, output.size) == (hashlib.sha256(data).hexdigest(), len(data))
        assert output.rows == 3
    parquet = pq.read_table(tmp_path / "flags.parquet")
    assert parquet["coupon_id"].to_pylist() == ["=7/A ä<b>", "NA", "0012"]
    assert parquet["value"].to_pylist() == [0.1, None, -0.0]
    assert parquet["value"].null_count == 1
    back = read_table(tmp_path, "flags")
    (tmp_path / "flags.parquet").unlink()
    assert read_table(tmp_path, "flags").equals(back)
    assert np.signbit(back["value"].to_numpy()[2])


def test_csv_as_a_person_sees_it(tmp_path: Path, table_of: TableOf) -> None:
    table = table_of("flags", 1, coupon_id=["=7/A ä<b>"], value=[5.25], unit=["%"])
    written(tmp_path, "flags", [table], ("csv",))
    header, row = (tmp_path / "flags.csv").read_bytes().decode().removesuffix("\n").split("\n")
    assert header == ",".join(contracts.load("out/flags").columns)
    assert row == (
        "warning,'=7/A ä<b>,,,few-readings,fewer than 3 readings,5.25,,%,,common practice,,,"
    )


def test_slices_leave_no_mark_on_the_bytes(tmp_path: Path, table_of: TableOf) -> None:
    n = 150_000
    value = np.random.default_rng(7).lognormal(size=n)
    whole = table_of("flags", n, value=value, coupon_id=[f"C{i}" for i in range(n)])
    cuts = [0, 1, 40_000, 70_000, n]
    slices = [whole.slice(a, b - a) for a, b in pairwise(cuts)]
    one = written(tmp_path / "one", "flags", [whole]).outputs
    many = written(tmp_path / "many", "flags", slices).outputs
    assert one == many
    with (tmp_path / "many" / "flags.csv").open(newline="") as file:
        numbers = [float(row["value"]) for row in csv.DictReader(file)]
    assert numbers == value.tolist()


@pytest.mark.parametrize("name", [n.removeprefix("out/") for n in contracts.names() if "out/" in n])
def test_a_table_without_rows_has_its_header_and_types(tmp_path: Path, name: str) -> None:
    writer = written(tmp_path, name, [])
    assert [output.rows for output in writer.outputs] == [0, 0]
    contract = contracts.load(f"out/{name}")
    assert (tmp_path / f"{name}.csv").read_text() == ",".join(contract.columns) + "\n"
    assert pq.read_schema(tmp_path / f"{name}.parquet").names == list(contract.columns)
    from_parquet = read_table(tmp_path, name)
    (tmp_path / f"{name}.parquet").unlink()
    assert read_table(tmp_path, name).schema == from_parquet.schema
    assert from_parquet.num_rows == 0


def test_parquet_says_what_its_columns_mean(tmp_path: Path) -> None:
    written(tmp_path, "coupons", [], ("parquet",))
    schema = pq.read_schema(tmp_path / "coupons.parquet")
    assert schema.metadata is not None
    assert schema.metadata[b"contract"] == b"out/coupons"
    assert schema.metadata[b"contract_version"] == contracts.load("out/coupons").version.encode()
    about = schema.field("dislocation_density_per_m2").metadata
    assert about is not None
    assert about[b"unit"] == b"m-2"  # UCUM
    assert about[b"description"]
    assert b"unit" not in (schema.field("coupon_id").metadata or {})
    assert arrow_schema(contracts.load("out/coupons")).equals(schema, check_metadata=True)


def test_columns_of_nothing_and_of_words_take_the_contracts_type(
    tmp_path: Path, table_of: TableOf
) -> None:
    table = table_of("flags", 2)
    place = table.column_names.index
    table = table.set_column(place("value"), "value", pa.nulls(2))
    level = table["level"].dictionary_encode()
    table = table.set_column(place("level"), "level", level)
    written(tmp_path, "flags", [table])
    assert read_table(tmp_path, "flags")["level"].to_pylist() == ["warning", "warning"]


def test_what_breaks_the_contract_is_not_written(tmp_path: Path, table_of: TableOf) -> None:
    bad = table_of("flags", 2, level=["warning", "grave"])
    with pytest.raises(RuntimeError, match=r"out/flags breaks its contract: column level.*grave"):
        written(tmp_path, "flags", [table_of("flags", 1), bad, table_of("flags", 1)])
    assert (tmp_path / "flags.csv").read_text().count("grave") == 0


def test_an_infinite_number_breaks_the_contract(tmp_path: Path, table_of: TableOf) -> None:
    bad = table_of("flags", 1, value=[float("inf")])
    with pytest.raises(RuntimeError, match="column value: must be finite"):
        written(tmp_path, "flags", [bad])


def test_a_missing_column_breaks_the_contract(tmp_path: Path, table_of: TableOf) -> None:
    bad = table_of("flags", 1).drop_columns(["detail"])
    with pytest.raises(RuntimeError, match="column detail: missing"):
        written(tmp_path, "flags", [bad])


@pytest.mark.parametrize("forms", [(), ("xlsx",), ("csv", "tsv")])
def test_an_unknown_form_is_refused(tmp_path: Path, forms: tuple[str, ...]) -> None:
    with pytest.raises(ValueError, match="csv or parquet"):
        written(tmp_path, "flags", [], forms)
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("form", BOTH)
def test_a_full_disk_reaches_the_caller_as_one_line(
    tmp_path: Path, table_of: TableOf, monkeypatch: pytest.MonkeyPatch, form: str
) -> None:
    real = os.write

    def full(handle: int, data: bytes) -> int:
        if Path(f"/proc/self/fd/{handle}").readlink().is_relative_to(tmp_path) and len(data) > 1000:
            raise OSError(errno.ENOSPC, "No space left on device")
        return real(handle, data)

    monkeypatch.setattr(os, "write", full)
    many = table_of("flags", 100_000, value=np.random.default_rng(1).normal(size=100_000))
    with pytest.raises(ResultsNotWritten, match=rf"flags\.{form}: .*the disk is full"):
        written(tmp_path, "flags", [many] * 4, (form,))


def test_no_thread_is_left_behind(tmp_path: Path, table_of: TableOf) -> None:
    before = threading.active_count()
    written(tmp_path, "flags", [table_of("flags", 10)])
    bad = table_of("flags", 1, level=["grave"])
    with pytest.raises(RuntimeError, match="grave"):
        written(tmp_path / "b", "flags", [bad])
    assert threading.active_count() == before
