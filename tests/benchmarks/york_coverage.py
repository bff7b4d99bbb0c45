"""How often the interval of a calibration's constants holds the truth: ``python york_coverage.py``.

Simulated sets of paired measurements with a known line and errors in both. u is that of the stated
errors, or grown by the root of chi-squared over its degrees of freedom with Student's k where the
fit is too bad, as `coldwork calibrate` does it.
"""

import sys

import numpy as np

from coldwork.statistics.goodness import goodness
from coldwork.statistics.student import student_quantile
from coldwork.statistics.york import fit_york

TRUTH = np.array([50.0, 10.3])  # baseline in MPa, slope in MPa um
CASES = (  # name, points, relative u of the density, of the stress, correlation, true over stated
    ("12 points, densities 10 %, stresses 1.2 %", 12, 0.10, 0.012, 0.0, 1.0),
    ("12 points, errors correlated by 0.5", 12, 0.10, 0.012, 0.5, 1.0),
    ("5 points", 5, 0.10, 0.012, 0.0, 1.0),
    ("40 points, densities 25 %", 40, 0.25, 0.012, 0.0, 1.0),
    ("12 points, errors twice as large as stated", 12, 0.10, 0.012, 0.0, 2.0),
)


def main(fits: int) -> None:
    """Print coverage of intercept, slope and ellipse for every case."""
    print(f"{fits} sets each; coverage of 95 % intervals")
    print(f"{'':46s}  baseline   slope  ellipse  too bad  too good")
    for name, n, u_rho, u_sigma, r, truth in CASES:
        rng = np.random.default_rng(20260803)
        root = np.sqrt(np.geomspace(1e13, 1e15, n)) / 1e6  # 1/um
        u_x, u_y = 0.5 * u_rho * root, u_sigma * (TRUTH[0] + TRUTH[1] * root)
        held = np.zeros((fits, 3), dtype=bool)
        verdicts = []
        for i in range(fits):
            z = rng.normal(size=(2, n))
            x = root + truth * u_x * z[0]
            y = TRUTH[0] + TRUTH[1] * root + truth * u_y * (r * z[0] + np.sqrt(1 - r * r) * z[1])
            line = fit_york(x, y, u_x, u_y, r).line
            fit = goodness(line.weighted_sum, line.degrees_of_freedom)
            freedom = float(n - 2) if fit.enlargement > 1.0 else np.inf
            k = float(student_quantile(0.975, np.array([freedom]))[0])
            off = line.value - TRUTH
            held[i, :2] = np.abs(off) <= k * fit.enlargement * line.u_stated
            reach = off @ np.linalg.solve(line.cofactor, off) / fit.enlargement**2
            held[i, 2] = reach <= 5.991
            verdicts.append(fit.verdict)
        share = 100.0 * held.mean(axis=0)
        told = [100.0 * verdicts.count(word) / fits for word in ("too bad", "too good")]
        print(f"{name:46s}  {share[0]:7.1f}  {share[1]:6.1f}  {share[2]:7.1f}", end="")
        print(f"  {told[0]:7.1f}  {told[1]:8.1f}")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 20_000)
