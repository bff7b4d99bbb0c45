"""A plan to its picture."""

from collections.abc import Iterator

import numpy as np

from coldwork.jobs.plan import MOST_INDENTS, Planned
from coldwork.plots import save
from coldwork.plots.trade import Reach, Trade, draw

__all__ = ["drawn"]

_MOST_COUPONS = 40  # that the curve of the reachable u is looked for among [1]


def drawn(planned: Planned) -> Iterator[tuple[str, bytes]]:
    """Draw a plan; name and bytes of SVG and PNG."""
    rows = [row for row in planned.table.to_pylist() if row["coupons"] is not None]
    forces = list(dict.fromkeys(row["force_n"] for row in rows))
    reach = tuple(_reach(planned, force, rows) for force in forces)
    found, best = planned.found, planned.cheapest
    trade = Trade(
        f"{found.group.name}, batch {found.group.batch}",
        planned.target,
        reach,
        (best["force_n"], best["indents_per_coupon"], best["coupons"], best["cost"]),
        best["relative_u"],
        found.shared_variance**0.5 / abs(found.value),
    )
    svg, png = save(draw(trade), "plan")
    yield "plots/plan.svg", svg
    yield "plots/plan.png", png


def _reach(planned: Planned, force: float, rows: list[dict[str, float]]) -> Reach:
    """Give cost against indents, and the best relative u that each sum can buy."""
    at = planned.found.at(force)
    mine = [row for row in rows if row["force_n"] == force]
    n = np.arange(1, _MOST_COUPONS + 1)[:, None]
    m = np.arange(1, MOST_INDENTS + 1)[None, :]
    cost = (n * (planned.wanted.coupon_cost + m * planned.wanted.indent_cost)).ravel()
    u = (at.u(n, m) / abs(planned.found.value)).ravel()
    order = np.lexsort((u, cost))
    lowest = np.minimum.accumulate(u[order])
    keep = np.flatnonzero(np.r_[True, lowest[1:] < lowest[:-1]])
    return Reach(
        force,
        np.array([row["indents_per_coupon"] for row in mine], dtype=np.float64),
        np.array([row["cost"] for row in mine], dtype=np.float64),
        np.array([row["coupons"] for row in mine], dtype=np.int64),
        cost[order][keep],
        lowest[keep],
    )
