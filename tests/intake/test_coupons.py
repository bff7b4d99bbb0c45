"""coupons.csv: what is kept as written, what counts as absent, what refuses the batch."""

from collections.abc import Callable
from hashlib import sha256

import numpy as np
import pyarrow as pa
import pytest
from numpy.testing import assert_array_equal

from coldwork.errors import BatchRefused
from coldwork.intake.coupons import Coupons, read_coupons
from coldwork.intake.files import TableFiles

Tables = Callable[..., TableFiles]


def read(files: TableFiles) -> Coupons:
    return read_coupons(files, "UTC", block_bytes=64)


def refusal(files: TableFiles) -> list[str]:
    with pytest.raises(BatchRefused) as refused:
        read(files)
    return [f"{cause.where}: {cause.what}. {cause.mend}" for cause in refused.value.causes]


def test_reads_every_column_in_si(tables: Tables) -> None:
    coupons = read(
        tables(
            "coupons",
            "coupon_id,lot_id,condition,prior_true_strain,prior_plastic_work_j_per_m3,"
            "thickness_mm,grain_size_um,u_grain_size_um,sampled_at\n"
            'A,L1,"rolled, 20 %",0.25,4.5e7,1.5,40,4,2026-03-31\n'
            "B,,,,,,,,\n",
        )
    )
    assert coupons.ids.to_pylist() == ["A", "B"]
    assert coupons.lot_ids.to_pylist() == ["L1", ""]
    assert coupons.conditions.to_pylist() == ["rolled, 20 %", ""]
    assert coupons.sampled_at.to_pylist() == ["2026-03-31", ""]
    # 1.5 mm and 40 um are 1.5e-3 m and 4e-5 m by the definition of the prefixes.
    assert_array_equal(coupons.prior_true_strain, [0.25, np.nan])
    assert_array_equal(coupons.prior_plastic_work, [4.5e7, np.nan])
    assert_array_equal(coupons.thickness, [1.5e-3, np.nan])
    assert_array_equal(coupons.grain_size, [4e-5, np.nan])
    assert_array_equal(coupons.u_grain_size, [4e-6, np.nan])
    assert_array_equal(coupons.line, [2, 3])
    assert coupons.bad_cells == ()
    assert len(coupons) == 2


def test_keeps_names_as_written(tables: Tables) -> None:
    names = ["0012", "NA", "nan", "'=7/A ä<b>", "1e3", " a ", "TRUE", "''x"]
    content = "coupon_id\n" + "\n".join(names) + "\n"
    coupons = read(tables("coupons", content))
    # One apostrophe in front is the mark of text that a spreadsheet would have run.
    expected = [name.removeprefix("'") for name in names]
    assert coupons.ids.to_pylist() == expected
    assert coupons.raw.column("coupon_id").to_pylist() == names
    assert coupons.index(pa.array(expected)).tolist() == list(range(8))
    assert coupons.index(pa.array(["12", "", "a"])).tolist() == [-1, -1, -1]


def test_puts_several_files_below_one_another(tables: Tables) -> None:
    first, second = "coupon_id,lot_id\nA,L\n\nB,M\n", "thickness_mm,coupon_id\n2,C\n"
    coupons = read(tables("coupons", first, second))
    assert coupons.ids.to_pylist() == ["A", "B", "C"]
    assert_array_equal(coupons.file, [0, 0, 1])
    assert_array_equal(coupons.line, [2, 4, 2])
    assert coupons.lot_ids.to_pylist() == ["L", "M", ""]
    assert_array_equal(coupons.thickness, [np.nan, np.nan, 2e-3])
    assert coupons.raw.column_names == ["coupon_id", "lot_id", "thickness_mm"]
    assert [source.rows_read for source in coupons.sources] == [2, 1]
    assert coupons.sources[0].sha256 == sha256(first.encode()).hexdigest()
    assert coupons.sources[0].path == "coupons-1.csv"
    assert coupons.sources[0].table == "coupons"


@pytest.mark.parametrize(
    ("column", "cell", "rule"),
    [
        ("thickness_mm", "1,5", "not-a-number"),
        ("thickness_mm", "0", "out-of-range"),
        ("thickness_mm", "-1", "out-of-range"),
        ("thickness_mm", "1e200", "out-of-range"),
        ("grain_size_um", "inf", "not-a-number"),
        ("u_grain_size_um", "-1", "out-of-range"),
        ("prior_true_strain", "20 %", "not-a-number"),
        ("prior_plastic_work_j_per_m3", "NA", "not-a-number"),
        ("sampled_at", "31.03.2026", "bad-time"),
        ("lot_id", "x" * 121, "out-of-range"),
        ("condition", "bell \x07", "out-of-range"),
    ],
)
def test_a_bad_optional_cell_counts_as_absent(
    tables: Tables, column: str, cell: str, rule: str
) -> None:
    content = f'coupon_id,{column}\nA,\nB,"{cell}"\n'
    if column == "u_grain_size_um":
        content = f"coupon_id,grain_size_um,{column}\nA,1,\nB,1,{cell}\n"
    coupons = read(tables("coupons", content))
    (bad,) = coupons.bad_cells
    assert (bad.coupon, bad.column, bad.raw, bad.rule) == (1, column, cell, rule)
    assert len(bad.hint) > 5
    for values in (coupons.thickness, coupons.prior_true_strain, coupons.prior_plastic_work,
                   coupons.u_grain_size):  # fmt: skip
        assert np.isnan(values).all()
    for texts in (coupons.lot_ids, coupons.conditions, coupons.sampled_at):
        assert texts.to_pylist() == ["", ""]


def test_an_uncertainty_without_its_value_counts_as_absent(tables: Tables) -> None:
    coupons = read(tables("coupons", "coupon_id,grain_size_um,u_grain_size_um\nA,,4\nB,x,4\nC,9,4"))
    assert [(bad.coupon, bad.column) for bad in coupons.bad_cells] == [
        (1, "grain_size_um"),
        (0, "u_grain_size_um"),
    ]
    assert_array_equal(coupons.u_grain_size, [np.nan, np.nan, 4e-6])
    alone = read(tables("coupons", "coupon_id,u_grain_size_um\nA,4\n"))
    assert [bad.column for bad in alone.bad_cells] == ["u_grain_size_um"]


def test_a_torn_row_refuses_the_batch(tables: Tables) -> None:
    (cause,) = refusal(tables("coupons", "coupon_id,lot_id\nA,L\n\nB\nC,M\n"))
    assert cause.startswith("coupons-1.csv, line 4: the row has 1 cells")


def test_repeated_names_refuse_the_batch(tables: Tables) -> None:
    causes = refusal(tables("coupons", "coupon_id\nA\nB\n'A\n", "coupon_id\nB\n"))
    assert [cause.split(". ")[0] for cause in causes] == [
        "coupons-1.csv, line 4, column coupon_id: coupon 'A' is listed again; "
        "first in coupons-1.csv, line 2, column coupon_id",
        "coupons-2.csv, line 2, column coupon_id: coupon 'B' is listed again; "
        "first in coupons-1.csv, line 3, column coupon_id",
    ]


@pytest.mark.parametrize("name", ["", "x" * 121, "a\tb", "a\x7fb", "a\u2028b", "a\x85b"])
def test_a_bad_name_refuses_the_batch(tables: Tables, name: str) -> None:
    (cause,) = refusal(tables("coupons", f"coupon_id,lot_id\nA,L\n{name},L\n"))
    assert cause.startswith("coupons-1.csv, line 3, column coupon_id: the name")


@pytest.mark.parametrize("name", ["x" * 120, "ä<b>", "../../etc", "日本", "a,b", 'say "x"', "=1+1"])
def test_any_printable_name_of_up_to_120_characters_is_taken(tables: Tables, name: str) -> None:
    quoted = name.replace('"', '""')
    coupons = read(tables("coupons", f'coupon_id\n"{quoted}"\n'))
    assert coupons.ids.to_pylist() == [name]


def test_a_list_of_no_coupon_refuses_the_batch(tables: Tables) -> None:
    (cause,) = refusal(tables("coupons", "coupon_id,lot_id\n\n"))
    assert "lists no coupon" in cause


def test_many_causes_of_one_kind_are_counted(tables: Tables) -> None:
    causes = refusal(tables("coupons", "coupon_id\n" + "A\n" * 101))
    assert len(causes) == 20
    assert "80 more of this kind" in causes[-1]


def test_all_files_are_read_before_the_batch_is_refused(tables: Tables) -> None:
    files = tables("coupons", "coupon_id,lot\nA,1\n", b"coupon_id\n\xff\n", "coupon_id,lot_id\nA\n")
    assert [cause.split(":")[0] for cause in refusal(files)] == [
        "coupons-1.csv, line 1",
        "coupons-2.csv",
        "coupons-3.csv, line 2",
    ]
