"""Inputs as draws: shared ones once for the batch, a coupon's own ones by its name."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from math import isfinite
from typing import Any

import numpy as np
from numpy.typing import NDArray

from coldwork.chain import Start
from coldwork.inputs.quantity import Input
from coldwork.interval.combine import Spread
from coldwork.measured import Measured, Value, value_of
from coldwork.sampling.streams import BLOCK, Distribution, deviations, distribution_of, generator

__all__ = ["Coupons", "Pool"]

_Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Coupons:
    """A few coupons that are drawn together, c of them.

    Attributes
    ----------
    names : sequence of str
        Their ids.
    rows : ndarray of intp, shape (c,)
        Their places in the slice.
    start : Start
        What the slice brings to the chain, with sensitivities. [SI]
    spreads : mapping of str to Spread
        Of every input, the coupons' own ones included.
    """

    names: Sequence[str]
    rows: NDArray[np.intp]
    start: Start
    spreads: Mapping[str, Spread]

    def only(self, keep: Sequence[int]) -> "Coupons":
        """Give some of them."""
        names = [self.names[i] for i in keep]
        return Coupons(names, self.rows[list(keep)], self.start, self.spreads)


class Pool:
    """The draws of a batch's inputs; shared ones are kept, own ones made when asked for.

    Parameters
    ----------
    seed : int
        Of the batch sheet.
    inputs : mapping of str to Input
        The method's.
    values : mapping of str to Value
        The chain's inputs, `Measured` where they are uncertain. [SI]
    spreads : mapping of str to Spread
        Of every input that they depend on.
    exact_shared : bool, optional
        Take shared inputs as exact (`basis = "own"`).
    """

    def __init__(
        self,
        seed: int,
        inputs: Mapping[str, Input],
        values: Mapping[str, Value],
        spreads: Mapping[str, Spread],
        *,
        exact_shared: bool = False,
    ) -> None:
        self._seed = seed
        self._values = values
        self._exact_shared = exact_shared
        self._distributions = {name: distribution_of(x) for name, x in inputs.items()}
        self._shared = {name: x.shared for name, x in spreads.items()}
        self._spreads = spreads
        self._kept: dict[tuple[str, int], _Floats] = {}
        self._common: dict[int, dict[str, Value]] = {}  # inputs without an own part, by block
        self._rooms: dict[str, _Floats] = {}
        self._again: dict[str, dict[int, int]] = {}

    def redrawn(self, blocks: int) -> dict[str, int]:
        """Count the draws of shared inputs that were drawn again in the first blocks."""
        counts = {
            name: sum(n for block, n in by_block.items() if block < blocks)
            for name, by_block in self._again.items()
        }
        return {name: n for name, n in counts.items() if n}

    def inputs(self, coupons: Coupons, block: int) -> dict[str, Value]:
        """Draw the chain's inputs: (draws,) where coupons share them, else (c, draws). [SI]."""
        if block not in self._common:
            self._common[block] = {
                name: self._drawn(x, coupons, block, name)
                for name, x in self._values.items()
                if not self._has_own_part(x)
            }
        common = self._common[block]
        return {
            name: common[name]
            if name in common
            else self._drawn(_rows_of(x, coupons.rows), coupons, block, name)
            for name, x in self._values.items()
        }

    def start(self, coupons: Coupons, block: int) -> Start:
        """Draw what the coupons bring to the chain: (c, draws), and (c, 1) what is exact. [SI]."""
        found: dict[str, Any] = {}
        for field in fields(Start):
            x = getattr(coupons.start, field.name)
            if isinstance(x, Measured):
                wide = self._drawn(_rows_of(x, coupons.rows), coupons, block, field.name)
                found[field.name] = np.asarray(wide)
            elif isinstance(x, np.ndarray) and x.ndim:
                found[field.name] = x[coupons.rows][:, np.newaxis]
            else:
                found[field.name] = x
        return Start(**found)

    def _has_own_part(self, x: Value) -> bool:
        named = x.sensitivities if isinstance(x, Measured) else ()
        return np.ndim(value_of(x)) > 0 or any(not self._shared.get(name, False) for name in named)

    def _drawn(self, x: Value, coupons: Coupons, block: int, label: str) -> Value:
        """Move a value by the draws of the inputs that it is linear in."""
        if not isinstance(x, Measured):
            return x
        value: _Floats = x.value[..., np.newaxis] if x.value.ndim else x.value
        for name, c in x.sensitivities.items():
            slope = c[..., np.newaxis] if c.ndim else c
            deviation = self._deviation(name, coupons, block, label)
            if deviation is None or not np.any(slope):
                continue
            if deviation.ndim == 1:
                value = value + (deviation if np.all(slope == 1.0) else slope * deviation)
                continue
            if not np.all(slope == 1.0):  # own draws are made for this value alone
                deviation *= slope
            deviation += value
            value = deviation
        return value

    def _deviation(self, name: str, coupons: Coupons, block: int, label: str) -> _Floats | None:
        shared = self._shared.get(name, False)
        if shared and self._exact_shared:
            return None
        if shared:
            return self._shared_deviation(name, block)
        if name in self._distributions:
            each = [self._distributions[name]] * len(coupons.names)
        else:
            each = _own(name, coupons)
        found = self._room(f"{label} {name}", len(each))
        for row, x, coupon in zip(found, each, coupons.names, strict=True):
            row[:] = deviations(x, generator(self._seed, name, coupon, block=block), BLOCK)[0]
        return found

    def _room(self, label: str, coupons: int) -> _Floats:
        """Give room for own draws of one value; it is used again for the next coupons."""
        room = self._rooms.get(label)
        if room is None or len(room) < coupons:
            room = self._rooms[label] = np.empty((coupons, BLOCK))
        return room[:coupons]

    def _shared_deviation(self, name: str, block: int) -> _Floats:
        if (name, block) not in self._kept:
            spread = self._spreads[name]
            known = self._distributions.get(name) or Distribution(
                name,
                0.0,
                float(spread.u),
                degrees_of_freedom=float(spread.degrees_of_freedom),
            )
            rng = generator(self._seed, name, block=block)
            found, again = deviations(known, rng, BLOCK)
            if name.startswith("tester:"):  # a mean goes with 1 / (1 + bias), to all orders
                off = 1.0 + known.value
                found = found * off / (off + found)
            self._kept[name, block] = found
            self._again.setdefault(name, {})[block] = again
        return self._kept[name, block]


def _own(name: str, coupons: Coupons) -> list[Distribution]:
    """Give each coupon's distribution of an input that is no number of the sheet."""
    n = len(coupons.start.scale)
    spread = coupons.spreads[name]
    u = np.broadcast_to(spread.u, (n,))[coupons.rows]
    freedom = np.broadcast_to(spread.degrees_of_freedom, (n,))[coupons.rows]
    grain = coupons.start.grain_size
    positive = isinstance(grain, Measured) and name in grain.sensitivities
    found = []
    for i, row in enumerate(coupons.rows):
        centre = float(grain.value[row]) if isinstance(grain, Measured) and positive else 0.0
        low = 0.0 if positive and isfinite(centre) else -np.inf
        label = f"{name} of coupon {coupons.names[i]}"
        found.append(
            Distribution(label, centre, float(u[i]), degrees_of_freedom=float(freedom[i]), low=low)
        )
    return found


def _rows_of(x: Value, rows: NDArray[np.intp]) -> Value:
    """Pick coupons out of what differs between them."""
    if not isinstance(x, Measured):
        return x[rows][:, np.newaxis] if isinstance(x, np.ndarray) and x.ndim else x
    picked = {name: c[rows] if np.ndim(c) else c for name, c in x.sensitivities.items()}
    return Measured(x.value[rows] if x.value.ndim else x.value, picked)
