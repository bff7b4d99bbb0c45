"""Published frames of invented batches, as the plots get them.

The strengths follow the shape of rolled copper from memory; nothing is tested
against these numbers, they only have to look like a batch.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TypeAlias

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from coldwork.plots import Context

FloatArray: TypeAlias = NDArray[np.float64]
IntArray: TypeAlias = NDArray[np.int64]
LIMIT: dict[str, object] = {
    "id": "anneal-window",
    "quantity": "stored_energy_j_per_g",
    "lower": 0.03,
    "upper": 0.12,
    "rule": "guarded",
    "basis": "own",
}
CONTEXT = Context(
    batch_id="CS-2026-31",
    material="copper",
    route="indent",
    coverage=0.95,
    limits=(LIMIT,),
    note="All rows describe the state before the test (test strain 0, the indent's own unwound).",
    timezone="Europe/Berlin",
)
LONG = (
    "strip from the second pass of the reversing mill, coil 4711, head end, "
    "cut {} of the outer wrap, kept dry, see ledger"
)
ODD_NAMES = (
    "=7/A ä<b>",
    "NA",
    "0012",
    "$x_1^2$ & $y$",
    " leading and trailing ",
    "中文-試験片-7",
    "tab_under_score_and_a_long_tail_" + "x" * 80,
    *(LONG.format(f"{i:03d}").ljust(120, ".") for i in range(6)),
    "W" * 119 + "1",
    "W" * 119 + "2",
    "i" * 60 + "one" + "i" * 57,
    "i" * 60 + "two" + "i" * 57,
)
REDUCTIONS = (0, 5, 10, 15, 20, 30, 40)
HARDNESS = (51.0, 68.0, 81.0, 90.0, 97.0, 106.0, 110.0)
ENERGY_FACTOR = 1.6e-16  # J/g for one line per m2, about
SHARES = {
    "hardening.coefficient": ("shared", -0.37),
    "indentation.constraint_factor": ("shared", -0.2),
    "hardening.taylor_factor": ("shared", -0.1),
    "strength.baseline_mpa": ("shared", -0.17),
    "repeatability": ("own", 0.03),
    "line_energy.core_radius_b": ("shared", -0.08),
    "line_energy.outer_radius_factor": ("shared", 0.07),
    "material.shear_modulus_gpa": ("shared", -0.05),
    "tester:T1": ("shared", -0.02),
    "indentation.representative_strain": ("shared", 0.03),
    "material.mass_density_kg_per_m3": ("shared", -0.001),
}


@dataclass(frozen=True)
class Batch:
    """Frames and what goes with them."""

    frames: dict[str, pd.DataFrame]
    context: Context

    def without(self, *tables: str) -> "Batch":
        return replace(self, frames={k: v for k, v in self.frames.items() if k not in tables})


def names_of(n: int, *, odd: bool = False) -> list[str]:
    usual = [f"CU-{i // 5 * 5:02d}-{i % 5 + 1}" if n <= 35 else f"CU-{i:04d}" for i in range(n)]
    if odd:
        usual[: min(n, len(ODD_NAMES))] = ODD_NAMES[:n]
    return usual


def batch(
    n: int,
    *,
    odd: bool = False,
    strains: bool = True,
    timed: bool = True,
    readings: int = 7,
    testers: Sequence[str] = ("T1", "T2"),
    operators: Sequence[str] = ("operator-1", "operator-2"),
    conditions: bool = True,
) -> Batch:
    """Make a batch of `n` coupons in up to seven conditions."""
    random = np.random.default_rng(n)
    ids = names_of(n, odd=odd)
    kind = np.arange(n) * len(REDUCTIONS) // n if n >= 7 else np.arange(n) + 1
    condition = [f"rolled {REDUCTIONS[k]} %" if conditions else "" for k in kind]
    truth = np.array(HARDNESS)[kind] * random.normal(1.0, 0.008, n)
    count = np.full(n, readings)
    if n >= 7:
        count[[3, 9 % n]] = 0, 1
    table = _readings(ids, truth, count, random, (timed, testers, operators))
    coupons = _coupons(ids, condition, table, count)
    frames = {
        "coupons": coupons,
        "readings": table,
        "set_aside": _set_aside(ids),
        "budget": _budget(coupons, random),
        "decisions": _decisions(coupons),
        "scatter": _scatter(ids, condition, table, count),
        "coupons_in": _coupons_in(ids, kind, strains=strains),
    }
    return Batch(frames, CONTEXT)


def _readings(
    ids: list[str],
    truth: FloatArray,
    count: IntArray,
    random: np.random.Generator,
    how: tuple[bool, Sequence[str], Sequence[str]],
) -> pd.DataFrame:
    timed, testers, operators = how
    place = np.repeat(np.arange(len(ids)), count)
    number = np.concatenate([np.arange(1, c + 1) for c in count]) if len(count) else count
    m = len(place)
    drift = np.linspace(0.0, 0.012, m)
    hardness = truth[place] * (1.0 + random.normal(0.0, 0.01, m) + drift)
    flags = np.full(m, "", dtype=object)
    if m > 30:
        hardness[17] *= 1.09
        flags[17] = "outlier"
        flags[25] = "diagonals-differ"
    minutes = np.cumsum(random.uniform(0.6, 1.6, m)) + 16 * 60 * (np.arange(m) // 130)
    start = pd.Timestamp("2026-05-04T06:12:00Z")
    times = [(start + pd.Timedelta(minutes=x)).isoformat() for x in minutes]
    return pd.DataFrame(
        {
            "coupon_id": [ids[i] for i in place.tolist()],
            "reading_no": number,
            "route": "indent",
            "scale": "HV",
            "force_n": 98.07,
            "mean_diagonal_um": np.sqrt(1.8544 * 10.0 / hardness) * 1e3,
            "hardness": hardness,
            "flow_stress_mpa": np.nan,
            "plastic_strain": np.nan,
            "weight": 1.0,
            "measured_at": times if timed else [None] * m,
            "operator": [
                operators[i % len(operators)] if operators else None for i in (place // 4).tolist()
            ],
            "tester": [
                testers[i % len(testers)] if testers else None for i in (place // 9).tolist()
            ],
            "flags": flags,
        }
    )


def _coupons(
    ids: list[str],
    condition: list[str],
    readings: pd.DataFrame,
    count: IntArray,
) -> pd.DataFrame:
    mean = readings.groupby("coupon_id")["hardness"].mean().reindex(ids).to_numpy()
    u_own = mean * 0.01 / np.sqrt(np.maximum(count, 1))
    u_shared = mean * 0.008
    u = np.hypot(u_own, u_shared)
    stress = (mean * 9.80665 / 3.0 - 50.0) * 1.55 - 178.0  # unwound, roughly
    u_stress_own, u_stress = u_own * 5.1, np.hypot(np.hypot(u * 5.1, 15.0), stress * 0.05)
    exists = stress > 0.0
    scale = (1.0 / (3.06 * 0.3 * 44e3 * 0.2556e-9)) ** 2

    def density(s: FloatArray) -> FloatArray:
        return np.asarray(np.maximum(s, 0.0) ** 2 * scale)

    late = np.exp(2.0 * 0.37)
    rho = np.where(exists, density(stress), np.nan)
    lower = np.where(exists, density(stress - 2 * u_stress) / late, 0.0)
    upper = density(stress + 2 * u_stress) * np.where(exists, late, 1.4)
    upper = np.where(upper > 0.0, upper, np.nan)
    frame = pd.DataFrame({"coupon_id": ids, "lot_id": "L1", "condition": condition})
    frame["hardness"], frame["hardness_scale"] = mean, np.where(count > 0, "HV10", "")
    frame["u_own_hardness"], frame["u_shared_hardness"], frame["u_hardness"] = u_own, u_shared, u
    frame["lower_hardness"], frame["upper_hardness"] = mean - 2 * u, mean + 2 * u
    for name, factor in (
        ("dislocation_density_per_m2", 1.0),
        ("stored_energy_j_per_g", ENERGY_FACTOR),
    ):
        y = rho * factor
        frame[name] = y
        frame[f"u_own_{name}"] = 2.0 * y * u_stress_own / np.abs(stress)
        frame[f"u_{name}"] = np.hypot(2.0 * y * u_stress / np.abs(stress), 0.37 * y)
        frame[f"lower_{name}"] = np.where(count > 0, lower * factor, np.nan)
        frame[f"upper_{name}"] = np.where(count > 0, upper * factor, np.nan)
    missing = np.where(np.isnan(upper), "below-baseline;baseline-contradicted", "below-baseline")
    frame["flags"] = np.where(count == 0, "no-readings", np.where(exists, "", missing))
    return frame


def _set_aside(ids: list[str]) -> pd.DataFrame:
    rows = [(1, "not-a-number", "d1_um", "1,5"), (1, "excluded", "hardness", "55.1")]
    rows += [(2, "row-width", "", "a;b;c")]
    frame = pd.DataFrame(
        [(ids[i % len(ids)], 9, rule, column, raw) for i, rule, column, raw in rows],
        columns=["coupon_id", "reading_no", "rule", "column", "raw"],
    )
    stray = pd.DataFrame(
        [{"coupon_id": "nowhere", "rule": "unlisted-coupon", "column": "coupon_id"}]
    )
    return pd.concat([frame, stray], ignore_index=True)


def _budget(coupons: pd.DataFrame, random: np.random.Generator) -> pd.DataFrame:
    parts = []
    valued = coupons[coupons["stored_energy_j_per_g"].notna()]
    y = valued["stored_energy_j_per_g"].to_numpy()
    raw = {}
    for name, (_, c) in SHARES.items():
        grows = (
            0.08 / np.maximum(y, 0.004) if name in {"strength.baseline_mpa", "repeatability"} else 1
        )
        raw[name] = c * y * grows * random.uniform(0.95, 1.05, len(y))
    total = np.sum([c**2 for c in raw.values()], axis=0)
    for name, part in raw.items():
        parts.append(
            pd.DataFrame(
                {
                    "coupon_id": valued["coupon_id"].to_numpy(),
                    "quantity": "stored_energy_j_per_g",
                    "input": name,
                    "contribution": part,
                    "own_or_shared": SHARES[name][0],
                    "share_of_u2": part**2 / total,
                }
            )
        )
    return pd.concat(parts, ignore_index=True)


def _decisions(coupons: pd.DataFrame) -> pd.DataFrame:
    name = "stored_energy_j_per_g"
    low, high = 0.03, 0.12
    y = coupons[name].to_numpy(dtype=np.float64)
    u = coupons[f"u_own_{name}"].to_numpy(dtype=np.float64)
    lower, upper = y - 1.65 * u, y + 1.65 * u
    decision = np.select(
        [(lower > low) & (upper < high), (upper < low) | (lower > high)],
        ["conforming", "non-conforming"],
        "undecided",
    )
    bound = np.where(np.abs(y - low) < np.abs(y - high), np.where(y > low, lower, upper), upper)
    return pd.DataFrame(
        {
            "coupon_id": coupons["coupon_id"],
            "limit_id": "anneal-window",
            "quantity": name,
            "bound": bound,
            "probability": np.clip(0.5 + np.minimum(y - low, high - y) / (4 * u), 0.0004, 0.9993),
            "decision": decision,
        }
    )


def _scatter(
    ids: list[str],
    condition: list[str],
    readings: pd.DataFrame,
    count: IntArray,
) -> pd.DataFrame:
    by_coupon = readings.groupby("coupon_id")["hardness"]
    relative = (by_coupon.std() / by_coupon.mean()).reindex(ids).to_numpy()
    frame = pd.DataFrame({"coupon_id": ids, "n": count, "relative_s": relative})
    frame["group"] = [f"HV10, {name}" for name in condition]
    square = frame["relative_s"] ** 2
    frame["pooled_relative_s"] = np.sqrt(square.groupby(frame["group"]).transform("median"))
    frame["limit_relative_s"] = frame["pooled_relative_s"] * 1.9
    frame["left_pool"] = frame["relative_s"] > frame["limit_relative_s"]
    return frame


def _coupons_in(ids: list[str], kind: IntArray, *, strains: bool) -> pd.DataFrame:
    reduction = np.array(REDUCTIONS)[kind] / 100.0
    strain = 2.0 / np.sqrt(3.0) * np.log(1.0 / (1.0 - reduction))
    if len(ids) > 10:
        strain[10] = np.nan
    return pd.DataFrame({"coupon_id": ids, "prior_true_strain": strain if strains else np.nan})


def awkward() -> Batch:
    """Make a batch of twelve in which everything that can be missing is."""
    made = batch(12, odd=True)
    coupons = made.frames["coupons"].copy()
    for name in ("dislocation_density_per_m2", "stored_energy_j_per_g"):
        value = coupons[name].to_numpy(copy=True)
        lower, upper = (coupons[f"{end}_{name}"].to_numpy(copy=True) for end in ("lower", "upper"))
        upper[1], lower[1] = 0.3 * value[8], 0.0  # below the baseline: an upper end only
        value[1:3] = np.nan
        upper[2] = np.nan  # not even that
        lower[5] = upper[5] = np.nan  # nothing to judge the scatter by
        upper[6] = np.nan  # one reading: the interval has no end
        coupons[name], coupons[f"lower_{name}"], coupons[f"upper_{name}"] = value, lower, upper
    coupons.loc[1, "flags"] = "below-baseline"
    coupons.loc[2, "flags"] = "below-baseline;baseline-contradicted"
    coupons.loc[4, ["hardness", "lower_hardness", "upper_hardness"]] = np.nan
    coupons.loc[4, "flags"] = "mixed-forces"
    coupons.loc[9:, "hardness_scale"] = "HBW2.5/62.5"
    coupons.loc[7, "condition"] = (
        "drawn through seven dies with an anneal between the fourth and the fifth"
    )
    limits = (
        LIMIT,
        {**LIMIT, "id": "floor", "lower": 0.01, "upper": None, "rule": "simple"},
        {
            **LIMIT,
            "id": "roof <&> $",
            "lower": None,
            "upper": 0.2,
            "rule": "probability",
            "basis": "total",
        },
        {"id": "dense", "quantity": "dislocation_density_per_m2", "lower": 1e14, "upper": None},
    )
    decisions = made.frames["decisions"]
    floor = decisions.assign(limit_id="floor", decision="conforming", bound=np.nan)
    frames = {**made.frames, "coupons": coupons, "decisions": pd.concat([decisions, floor])}
    return Batch(
        frames,
        replace(CONTEXT, limits=limits, batch_id="B-" + "long-" * 40, material="Cu-30Zn $x$"),
    )


def flow(n: int = 6) -> Batch:
    """Make a batch of flow curves: points at several strains, one of them repeated."""
    random = np.random.default_rng(n)
    ids = [f"SW-{i}" for i in range(n)]
    stress = np.array([230.0, 430.0, 540.0, 660.0, 850.0, 1010.0])[np.arange(n) % 6]
    strains = [0.001, 0.002, 0.002, 0.002, 0.005, 0.01]
    rows = [
        (
            ids[i],
            k + 1,
            stress[i] * (1.0 + 4.0 * (e - 0.002)) + random.normal(0.0, 4.0),
            e,
            float(e == 0.002),
        )
        for i in range(n)
        for k, e in enumerate(strains)
    ]
    readings = pd.DataFrame(
        rows, columns=["coupon_id", "reading_no", "flow_stress_mpa", "plastic_strain", "weight"]
    )
    mean = (
        readings[readings["weight"] > 0].groupby("coupon_id")["flow_stress_mpa"].mean().to_numpy()
    )
    rho = ((mean - 150.0) / (2.75 * 0.3 * 82e3 * 0.2482e-9)) ** 2
    coupons = pd.DataFrame(
        {"coupon_id": ids, "condition": [f"drawn {i}" for i in range(n)], "flags": ""}
    )
    for name, y, u_own, u in (
        ("flow_stress_mpa", mean, 3.0, 3.0),
        ("dislocation_density_per_m2", rho, 0.04 * rho, 0.4 * rho),
        ("stored_energy_j_per_mol", 1.9e-14 * rho, 0.07e-14 * rho, 0.7e-14 * rho),
    ):
        coupons[name], coupons[f"u_own_{name}"], coupons[f"u_{name}"] = y, u_own, u
        coupons[f"lower_{name}"] = y * np.exp(-2 * u / y)
        coupons[f"upper_{name}"] = y * np.exp(2 * u / y)
    limit = {
        **LIMIT,
        "id": "wire",
        "quantity": "stored_energy_j_per_mol",
        "lower": 5,
        "upper": None,
    }
    context = replace(CONTEXT, route="flow", material="low-carbon steel", limits=(limit,), note="")
    return Batch({"coupons": coupons, "readings": readings}, context)
