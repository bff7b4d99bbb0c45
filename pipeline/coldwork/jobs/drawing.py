"""Plots of a batch: its tables as frames, then as pictures."""

from collections.abc import Iterator
from typing import TYPE_CHECKING, Final

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from coldwork import contracts
from coldwork.jobs.curve_frames import curve_frames
from coldwork.jobs.gather import Gathered
from coldwork.jobs.size_frames import size_frames

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["MOST_COUPONS", "Drawing"]

MOST_COUPONS: Final = 2000  # above this a plot of single coupons tells nothing any more
_FRAMES: Final = (
    "coupons",
    "readings",
    "set_aside",
    "budget",
    "decisions",
    "quantities",
    "flags",
    "tensile",
    "evolution",
)


class Drawing:
    """Keeps the tables that plots are drawn from, if any are to be drawn.

    Parameters
    ----------
    batch : Gathered
        The batch.
    wanted : bool
        Whether anybody wants plots.

    Attributes
    ----------
    said : str
        What was drawn, or why nothing was.
    """

    def __init__(self, batch: Gathered, *, wanted: bool) -> None:
        self._batch = batch
        self._parts: dict[str, list[pa.Table]] = {name: [] for name in _FRAMES}
        self.wanted = wanted and len(batch.coupons) <= MOST_COUPONS
        self.said = "not asked for" if not wanted else ""
        if wanted and not self.wanted:
            self.said = f"none: more than {MOST_COUPONS} coupons"

    def add(self, name: str, table: pa.Table) -> None:
        """Keep a slice of a table."""
        if name == "readings" and self._batch.method.both:  # the plot of readings is of indents
            table = table.filter(pc.equal(table["route"], pa.scalar("indent")))
        if self.wanted and name in self._parts:
            self._parts[name].append(table)

    def files(self) -> Iterator[tuple[str, bytes]]:
        """Draw everything; name and bytes of each file, SVG and PNG."""
        if not self.wanted:
            return
        from coldwork.plots import Context, draw_all, save  # here: it takes half a second

        method = self._batch.method
        context = Context(
            batch_id=method.batch_id,
            material=method.material,
            route=method.route,
            coverage=method.coverage,
            limits=[
                {
                    "id": x.id,
                    "quantity": x.quantity,
                    "lower": x.lower,
                    "upper": x.upper,
                    "rule": x.rule,
                    "basis": x.basis,
                }
                for x in method.limits
            ],
            note=self._note(),
            timezone=method.timezone,
        )
        drawn = 0
        for stem, figure in draw_all(self._frames(), context):
            svg, png = save(figure, stem)
            yield f"plots/{stem}.svg", svg
            yield f"plots/{stem}.png", png
            drawn += 1
        self.said = f"{drawn} drawn"

    def _note(self) -> str:
        method = self._batch.method
        if method.laws.route == "flow":
            return f"State at a plastic strain of {method.plastic_strain:g}."
        if method.both:
            state = "before the tests" if method.laws.unwinding else "under the indent"
            return f"State {state}; indents and flow curves joined, see routes.csv."
        if method.laws.unwinding:
            return "State before the test: the strain of the indent is taken out."
        return "State under the indent: its own strain is included."

    def _frames(self) -> dict[str, "pd.DataFrame"]:
        from coldwork.contracts.frames import frame  # here: it brings pandas

        frames = {
            name: frame(contracts.load(f"out/{name}"), pa.concat_tables(parts))
            for name, parts in self._parts.items()
            if parts
        }
        beside = {"scatter": self._scatter(), "coupons_in": self._coupons_in()}
        curves = self._batch.curves
        if "readings" in frames:
            b = self._batch
            beside |= size_frames(b.method, b.reduced, b.coupons, frames["readings"])
        return frames | beside | (curve_frames(curves, self._batch.coupons) if curves else {})

    def _scatter(self) -> "pd.DataFrame":
        import pandas as pd

        x, ids = self._batch.scatter, self._batch.coupons.ids
        return pd.DataFrame(
            {
                "coupon_id": ids.to_pylist(),
                "n": self._batch.reduced.repeats,
                "relative_s": x.relative_s,
                "pooled_relative_s": x.pooled,
                "limit_relative_s": x.limit,
                "left_pool": x.left,
                "group": [str(g) for g in x.group],
            }
        )

    def _coupons_in(self) -> "pd.DataFrame":
        import pandas as pd

        coupons = self._batch.coupons
        strain = np.asarray(coupons.prior_true_strain)
        return pd.DataFrame({"coupon_id": coupons.ids.to_pylist(), "prior_true_strain": strain})
