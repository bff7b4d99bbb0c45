"""Do the uncertainties of a reduced curve hold, and are its faults found?

Noisy curves of metals whose truth is known in closed form, each seed with noise of its own.
Wanted of slope, R_p0.2, R_m, A_g, theta_0 and sigma_s: mean error under a tenth of u (R_m
aside, which is the greatest recorded point and says its bias) and the truth within 2 u in
at least 92 %. Of each planted fault: found in at least 95 %; of clean curves: anything found
in less than 2 %. No seeds leave a part out.

    python -m tests.benchmarks.tensile_coverage [seeds [seeds for faults]]
"""

import sys
from collections.abc import Iterator
from typing import Final

import numpy as np
from numpy.typing import NDArray
from tests.reduce.made_curves import GEOMETRY, METALS, NOISY, Metal, Voce, recorded
from tests.reduce.made_faults import CLEAN, PLANTED

from coldwork.reduce.curve import CurveResult, CurveSettings, Valued
from coldwork.reduce.curve_reduction import reduce_curve

FloatArray = NDArray[np.float64]

SEED: Final = 20263
BIAS: Final = 0.1  # of u
COVERED: Final = 0.92
FOUND: Final = 0.95
FALSE_ALARMS: Final = 0.02
STRAINS: Final = (0.002, 0.01, 0.03)
PROMISED: Final = ("slope", "R_p0.2", "R_m", "A_g", "theta_0", "sigma_s")


def main() -> None:
    """Print coverage of every result and the rate at which faults are found."""
    seeds = int(sys.argv[1]) if len(sys.argv) > 1 else 500
    fault_seeds = int(sys.argv[2]) if len(sys.argv) > 2 else 200
    bad = 0
    print(f"{seeds} seeds a metal, 2 u; * is promised, the rest is told")
    print(
        f"{'metal':14s} {'result':18s} {'u / value':>9s} {'bias / u':>9s} {'covered':>8s}  verdict"
    )
    for name, metal in METALS.items() if seeds else ():
        for result, (u, bias, covered) in coverage(metal, seeds).items():
            promised = result in PROMISED
            good = covered >= COVERED and (abs(bias) <= BIAS or result == "R_m")
            bad += promised and not good
            verdict = ("as wanted" if good else "OUTSIDE") if promised else ""
            mark = "*" if promised else " "
            print(f"{name:14s} {result:16s} {mark} {u:9.1e} {bias:9.3f} {covered:8.1%}  {verdict}")
    print(f"\n{fault_seeds} seeds a fault")
    for name in PLANTED if fault_seeds else ():
        found, others = detection(name, fault_seeds)
        good = found >= FOUND
        bad += not good
        verdict = "as wanted" if good else "OUTSIDE"
        print(f"{name:24s} found {found:7.1%}, another too {others:6.1%}  {verdict}")
    for name in CLEAN if fault_seeds else ():
        alarms = false_alarms(name, fault_seeds)
        good = alarms < FALSE_ALARMS
        bad += not good
        print(f"clean: {name:17s} alarm {alarms:7.1%}  {'as wanted' if good else 'OUTSIDE'}")
    print(f"{bad} outside what is wanted")
    sys.exit(bad > 0)


def coverage(metal: Metal, seeds: int) -> dict[str, tuple[float, float, float]]:
    """Median relative u, mean error over u, and share of truths within 2 u, by result."""
    errors: dict[str, list[tuple[float, float]]] = {}
    settings = CurveSettings(reported_strains=STRAINS)
    for seed in range(seeds):
        rng = np.random.default_rng([SEED, seed])
        result = reduce_curve(recorded(metal, NOISY, rng), GEOMETRY, settings)
        for name, found, truth in compared(result, metal):
            error = (np.nan, np.nan)
            if found is not None:
                error = ((found.value - truth) / found.u_own, found.u_own / truth)
            errors.setdefault(name, []).append(error)
    told = {}
    for name, pairs in errors.items():
        z, u = np.array(pairs).T
        within = np.abs(z) <= 2.0  # a result that is not there is a miss
        told[name] = (float(np.nanmedian(u)), float(np.nanmean(z)), float(within.mean()))
    return told


def compared(result: CurveResult, metal: Metal) -> Iterator[tuple[str, Valued | None, float]]:
    """Every result of a curve beside its truth."""
    yield "slope", result.slope, metal.slope
    yield "toe", result.toe_strain, NOISY.toe
    yield "R_p0.2", result.proof.get(0.002), metal.proof(0.002)
    yield "R_m", result.tensile_strength, metal.strength
    yield "A_g", result.uniform_elongation, metal.elongation
    yield "uniform strain", result.uniform_plastic_strain, metal.uniform
    yield "work to there", result.work_to_uniform, metal.work(metal.uniform)
    for point in result.at_strains:
        at = f"at {point.strain:g}"
        yield f"stress {at}", point.flow_stress, float(metal.law.stress(point.strain))
        yield f"work {at}", point.work, metal.work(point.strain)
        yield f"rate {at}", point.rate, metal.law.rate(point.strain)
    if isinstance(metal.law, Voce) and result.kocks_mecking is not None:
        line = result.kocks_mecking
        yield "theta_0", line.valued("initial_hardening"), metal.law.kappa * metal.law.limit
        yield "sigma_s", line.valued("saturation_stress"), metal.law.limit


def detection(name: str, seeds: int) -> tuple[float, float]:
    """Shares of seeds in which a planted fault is found, and in which an unrelated one is."""
    found = others = 0
    for seed in range(seeds):
        made = PLANTED[name](np.random.default_rng([SEED, seed]))
        kinds = {f.kind for f in reduce_curve(made.curve, GEOMETRY, made.settings).faults}
        found += made.kind in kinds
        others += bool(kinds - {made.kind} - made.may)
    return found / seeds, others / seeds


def false_alarms(name: str, seeds: int) -> float:
    """Share of clean curves on which anything is found."""
    alarms = 0
    for seed in range(seeds):
        made = CLEAN[name](np.random.default_rng([SEED, seed]))
        alarms += bool(reduce_curve(made.curve, GEOMETRY, made.settings).faults)
    return alarms / seeds


if __name__ == "__main__":
    main()
