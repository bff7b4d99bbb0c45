"""A coupon's account: numbers that can be checked by hand, and refusals that say what to do."""

import hashlib
import json
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa
import pytest

from coldwork import contracts
from coldwork.contracts.arrays import arrow_type
from coldwork.errors import Exit, UsageError
from coldwork.jobs.trace import trace
from coldwork.results.documents import dump
from coldwork.results.records import Common, Slice, Step, build, seal
from coldwork.results.target import open_target

NAMES = ["=7/A ä<b>", "NA", "0012"]
SHA = "0" * 64


def table_of(name: str, rows: int, **columns: Sequence[object]) -> pa.Table:
    fields = contracts.load(f"out/{name}").fields
    return pa.table(
        {f.name: pa.array(columns.get(f.name, [None] * rows), arrow_type(f)) for f in fields}
    )


METHOD: dict[str, Any] = {
    "schema_version": "1.0.0",
    "batch_id": "B-1",
    "material": {"name": "copper"},
    "sheets": [{"path": "batch.toml", "sha256": SHA}],
    "laws": {"route": "indent"},
    "inputs": {
        "indentation.constraint_factor": {
            "value": 3.0, "u": 0.15, "unit": "1", "shape": "normal", "factor": None,
            "shared": True, "degrees_of_freedom": None, "source": "common practice",
            "origin": "default",
        },
        "hardening.coefficient": {
            "value": 0.3, "u": 0.055, "unit": "1", "shape": "lognormal", "factor": 1.2,
            "shared": True, "degrees_of_freedom": None, "source": "", "origin": "sheet",
        },
    },
    "testers": [], "limits": [], "uncertainty": {}, "temperature": {}, "flow": {},
    "output": {}, "derived": {}, "versions": {"coldwork": "0"},
}  # fmt: skip


def manifest_of(batch: Path) -> dict[str, Any]:
    inputs = [
        {
            "path": name, "table": table, "sha256": hashlib.sha256(data).hexdigest(),
            "bytes": len(data), "rows_read": 0, "rows_used": 0, "rows_set_aside": 0,
        }
        for name, table, data in (
            (path.name, path.stem.replace("batch", "sheet"), path.read_bytes())
            for path in sorted(batch.iterdir())
        )
    ]  # fmt: skip
    zero = dict.fromkeys(("readings_read", "readings_used", "readings_set_aside", "coupons"), 0)
    run = dict.fromkeys(("started_at", "finished_at", "host", "user", "python", "platform"), "x")
    return {
        "schema_version": "1.0.0", "batch_id": "B-1", "inputs": inputs,
        "reconciled": zero, "run": run,
    }  # fmt: skip


def slice_of() -> Slice:
    """Three coupons; all that is of interest belongs to the first."""
    first = [NAMES[0]]
    readings = table_of(
        "readings", 1, coupon_id=first, reading_no=[1], route=["indent"], scale=["HV"],
        force_n=[98.07], mean_diagonal_um=[477.5], hardness=[81.33], weight=[1.0],
        file=["indents.csv"], line=[17],
    )  # fmt: skip
    set_aside = table_of(
        "set_aside", 2, table=["indents"] * 2, coupon_id=first * 2, reading_no=[2, 3],
        file=["indents.csv"] * 2, line=[18, 19], column=["d1_um", None], raw=["477,\x1b[5", None],
        rule=["not-a-number", "excluded"], statement=["the cell is not a number", "taken out"],
        hint=["a decimal comma", None], excluded_by=[None, "operator-1"],
        excluded_at=[None, "2026-05-04T08:00:00Z"], reason=[None, "on a scratch"],
    )  # fmt: skip
    quantities = table_of(
        "quantities", 3, coupon_id=first * 3,
        quantity=["hardness", "stored_energy_j_per_g", "mean_spacing_nm"],
        value=[81.33, 0.0421, None], u=[0.75, 0.0216, None], u_own=[0.75, 0.0, None],
        u_shared=[0.0, 0.0216, None], unit=["kgf/mm2", "J/g", "nm"], coverage=[0.95] * 3,
        lower=[79.8, 0.014, 812.0], upper=[82.9, 0.106, None], degrees_of_freedom=[24.0, 4e6, None],
    )  # fmt: skip
    flags = table_of(
        "flags", 1, level=["warning"], coupon_id=first, rule=["few-readings"],
        statement=["fewer than 3 readings"], value=[1.0], limit=[3.0], unit=["1"],
        source=["common practice"],
    )  # fmt: skip
    decisions = table_of(
        "decisions", 1, coupon_id=first, limit_id=["window"], rule=["guarded"], basis=["own"],
        quantity=["stored_energy_j_per_g"], decision=["undecided"], probability=[0.934],
        reason=["the interval holds the lower limit 0.02 J/g"],
    )  # fmt: skip
    steps = [
        Step("mean hardness", "relation 1", "hardness", "kgf/mm2", np.array([81.33, np.nan, 7.0]),
             "the mean of the readings", ("repeatability",)),
        Step("flow stress", "relation 2, Tabor 1951", "indented_stress_mpa", "MPa",
             np.array([265.86, np.nan, 7.0]), "pressure over constraint factor",
             ("hardness", *METHOD["inputs"], "grain_size_um")),
        Step("mean spacing", "definition", "mean_spacing_nm", "nm", np.array([9e3, 1.0, 1.0]),
             "", ("indented_stress_mpa",)),
    ]  # fmt: skip
    return Slice(
        coupons=table_of("coupons", 3, coupon_id=NAMES, decision=["undecided", None, None]),
        files=["coupons.csv"] * 3,
        lines=[2, 3, 4],
        raw=pa.table({"coupon_id": NAMES, "grain_size_um": ["20.50", "", ""]}),
        readings=readings,
        raw_readings=pa.table({"indent_no": ["1"], "d1_um": ["475.2"], "d2_um": ["479.8"]}),
        set_aside=set_aside,
        quantities=quantities,
        flags=flags,
        decisions=decisions,
        repeatability=[{"basis": "pooled", "u": 0.75, "unit": "kgf/mm2", "left": False}] * 3,
        steps=steps,
    )


def write(tmp_path: Path, *, full: bool = True) -> tuple[Path, list[dict[str, Any]]]:
    batch = tmp_path / "batch"
    batch.mkdir()
    for name in ("batch.toml", "coupons.csv", "indents.csv"):
        (batch / name).write_text(name)
    with open_target(tmp_path / "results", "B-1") as target:
        method = dump("method", METHOD)
        target.write("method.json", method)
        inputs = METHOD["inputs"]
        records = build(Common("B-1", hashlib.sha256(method).hexdigest(), inputs), slice_of())
        sealed = [seal(record) for record in records]
        if full:
            lines = target.lines("records.jsonl")
            lines.write([one.line for one in sealed])
            lines.close()
        coupons = target.table("coupons", ("csv",))
        coupons.write(
            table_of(
                "coupons", 3, batch_id=["B-1"] * 3, coupon_id=NAMES, material=["copper"] * 3,
                route=["indent"] * 3, hardness_scale=["HV10"] * 3, readings_used=[1, 0, 0],
                readings_set_aside=[2, 0, 0], hardness=[81.33, None, None],
                stored_energy_j_per_g=[0.0421, None, None],
                record_sha256=[one.sha256 if full else None for one in sealed],
            )
        )  # fmt: skip
        coupons.close()
        decisions = target.table("decisions", ("csv",))
        decisions.write(
            table_of(
                "decisions", 1, coupon_id=NAMES[:1], limit_id=["window"], rule=["guarded"],
                quantity=["stored_energy_j_per_g"], lower_limit=[0.02], basis=["own"],
                coverage=[0.95], decision=["undecided"], reason=["not clear of the limit"],
            )
        )  # fmt: skip
        decisions.close()
        target.commit(manifest_of(batch))
    return tmp_path / "results" / "B-1", records


@pytest.fixture
def results(tmp_path: Path) -> Path:
    return write(tmp_path)[0]


def test_the_account_has_every_station(results: Path) -> None:
    text = trace(results, NAMES[0]).text()
    for line in (
        "Stored energy in dislocations, coupon =7/A ä<b>",
        "batch B-1, material copper, route indent, hardness scale HV10",
        # JCGM 100, 7.2.6: u to two digits, the value to match.
        "0.042 ± 0.022 J/g; 95 % interval from 0.014 to 0.106 J/g",
        "  coupons.csv, line 2: grain_size_um 20.50",
        "  no. 1, indents.csv, line 17: d1_um 475.2, d2_um 479.8",
        "    gives mean diagonal 477.5 um, hardness 81.33 kgf/mm2, weight 1.000",
        '  no. 2, indents.csv, line 18: d1_um "477,\\x1b[5" [not-a-number]',
        "    the cell is not a number. a decimal comma.",
        "    taken out. Taken out by operator-1 at 2026-05-04T08:00:00Z: on a scratch.",
        "  basis: pooled",
        "  left: no",
        "  1. mean hardness: 81.33 ± 0.75 kgf/mm2  [relation 1]",
        "     from repeatability: u 0.7500 kgf/mm2, as above",
        "  2. flow stress: 265.9 MPa  [relation 2, Tabor 1951]",
        "     from hardness: 81.33 ± 0.75 kgf/mm2 (step 1)",
        "     from indentation.constraint_factor: 3.00 ± 0.15 (default; common practice)",
        "     from hardening.coefficient: 0.3000, times or over 1.2 (lognormal) (sheet)",
        "     from grain_size_um: 20.50 (coupons.csv, line 2)",
        "  3. mean spacing: 9000 nm, not published: a flag below empties it  [definition]",
        "  hardness: 81.33 ± 0.75 kgf/mm2; 95 % interval from 79.80 to 82.90 kgf/mm2",
        "    u of its own 0.75, shared 0, 24 degrees of freedom",
        "    u of its own 0, shared 0.022, more than 1000 degrees of freedom",
        "  mean_spacing_nm: none; 95 % interval from 812.0 nm, without an upper end",
        "  warning few-readings",
        "    fewer than 3 readings; found 1.000, limit 3.000 (common practice)",
        "Decision: undecided",
        "  window: undecided (guarded, basis own, probability 0.9340)",
        "    the interval holds the lower limit 0.02 J/g",
    ):
        assert line in text.split("\n")
    assert "Calorimetry finds more" in text
    assert "An estimate releases no part by itself" in text
    assert text.isprintable() or text.replace("\n", "").isprintable()


def test_a_coupon_with_nothing_has_an_account_too(results: Path) -> None:
    text = trace(results, "NA").text()
    assert "coupon NA" in text
    assert "Readings used: 0" in text
    assert "from grain_size_um: not given" in text
    assert "Decision: no limit was given" in text


def test_a_name_of_digits_is_found_as_it_is_written(results: Path) -> None:
    assert trace(results, "0012").record["coupon_id"] == "0012"
    with pytest.raises(UsageError, match="no coupon is called '12'"):
        trace(results, "12")


def test_for_a_program_it_has_every_digit_and_the_inputs_used(results: Path) -> None:
    found = json.loads(json.dumps(trace(results, NAMES[0]).as_json(), allow_nan=False))
    assert found["heading"] == "Stored energy in dislocations"
    assert found["coupon"]["stored_energy_j_per_g"] == 0.0421
    assert found["coupon"]["lot_id"] is None
    assert found["record"]["steps"][1]["value"] == 265.86
    assert set(found["inputs"]) == set(METHOD["inputs"])


def test_an_unknown_coupon_is_answered_with_the_nearest_names(results: Path) -> None:
    with pytest.raises(UsageError, match=r"called '=7/A ä<c>'. The nearest: '=7/A ä<b>'") as caught:
        trace(results, "=7/A ä<c>")
    assert caught.value.exit is Exit.USAGE


def test_an_unknown_coupon_with_no_near_name_is_answered_with_all_of_few(results: Path) -> None:
    with pytest.raises(UsageError, match=r"'zz'. There are '=7/A ä<b>', 'NA', '0012'\."):
        trace(results, "zz")


def test_a_folder_without_results_is_told(results: Path, tmp_path: Path) -> None:
    with pytest.raises(UsageError, match="It holds the results B-1"):
        trace(results.parent, "NA")
    with pytest.raises(UsageError, match="no results are here"):
        trace(tmp_path / "nowhere", "NA")


@pytest.mark.parametrize(
    ("name", "old", "new", "said"),
    [
        ("records.jsonl", b"475.2", b"475.3", "is not the one that coupons was written with"),
        ("method.json", b"0.15", b"0.16", r"method\.json: was changed"),
        ("coupons.csv", b"81.33", b"18.33", r"coupons\.csv: was changed .* Fetch the results"),
        ("decisions.csv", b"undecided", b"conforming", r"decisions\.csv: was changed"),
    ],
)
def test_what_was_changed_afterwards_is_not_told_as_true(
    results: Path, name: str, old: bytes, new: bytes, said: str
) -> None:
    path = results / name
    data = path.read_bytes()
    assert old in data
    path.write_bytes(data.replace(old, new))
    with pytest.raises(UsageError, match=said):
        trace(results, NAMES[0])


def test_a_missing_records_file_is_told(results: Path) -> None:
    (results / "records.jsonl").unlink()
    with pytest.raises(UsageError, match=r"records\.jsonl: holds no record"):
        trace(results, NAMES[0])


# A summary keeps no records: the coupon is computed again from its source files.


def again(record: Mapping[str, Any]) -> Callable[[Path, str], Mapping[str, Any]]:
    def retrace(batch: Path, coupon: str) -> Mapping[str, Any]:
        assert (batch / "batch.toml").is_file()
        assert coupon == record["coupon_id"]
        return record

    return retrace


def test_a_summary_goes_back_to_the_source_files(tmp_path: Path) -> None:
    results, records = write(tmp_path, full=False)
    found = trace(results, NAMES[0], batch=tmp_path / "batch", retrace=again(records[0]))
    assert found.recomputed
    assert found.record == records[0]
    assert "Computed again for this account" in found.text()
    with pytest.raises(UsageError, match=r"is a summary.*name the batch folder"):
        trace(results, NAMES[0])


def test_a_source_file_that_changed_is_named(tmp_path: Path) -> None:
    results, records = write(tmp_path, full=False)
    batch = tmp_path / "batch"
    (batch / "indents.csv").write_text("other")
    (batch / "coupons.csv").unlink()
    with pytest.raises(UsageError, match=r"coupons\.csv is missing, indents\.csv has changed"):
        trace(results, NAMES[0], batch=batch, retrace=again(records[0]))


def test_another_outcome_from_the_same_files_is_told(tmp_path: Path) -> None:
    results, records = write(tmp_path, full=False)
    records[0]["quantities"]["hardness"]["value"] = 81.34
    with pytest.raises(UsageError, match="hardness came out differently"):
        trace(results, NAMES[0], batch=tmp_path / "batch", retrace=again(records[0]))
