"""Faults of tests, planted in the curves of ``made_curves``. All invented."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray
from tests.reduce.made_curves import (
    COPPER,
    GEOMETRY,
    METALS,
    NOISY,
    POWER,
    ROLLED_COPPER,
    STEEL,
    Metal,
    Plan,
    recorded,
)

from coldwork.reduce.curve import Curve, CurveSettings, FaultKind

FloatArray = NDArray[np.float64]
Change = Callable[[FloatArray, FloatArray], tuple[FloatArray, FloatArray]]
BY_EXTENSION: Final = CurveSettings()
BY_CROSSHEAD: Final = CurveSettings(strain_from="crosshead")
MACHINE: Final = 1.0 / 25e9  # strain that the machine gives per stress, with a crosshead [1/Pa]


@dataclass(frozen=True)
class Made:
    """A curve with a planted fault, and what should be found."""

    curve: Curve
    settings: CurveSettings
    kind: FaultKind | None
    may: frozenset[FaultKind] = frozenset()  # that follow from it, and may be found too


def clean(metal: Metal, rng: np.random.Generator) -> Made:
    return Made(recorded(metal, NOISY, rng), BY_EXTENSION, None)


def clean_to_the_break(rng: np.random.Generator) -> Made:
    """Any of the metals, sampled and noisy as may be, with a neck short or long, steep or not."""
    metal = list(METALS.values())[int(rng.integers(len(METALS)))]
    density = 10.0 ** rng.uniform(-1.0, 0.2)
    past, fall = 10.0 ** rng.uniform(-2.0, -0.3), rng.uniform(0.03, 0.9)
    plan = Plan(
        elastic=max(12, int(400 * density)),
        knee=int(1600 * density),
        rest=int(3000 * density),
        end=1.1 + past,
        neck=past * metal.uniform / fall**0.25,
        noise_stress=10.0 ** rng.uniform(4.3, 5.5),
        noise_strain=10.0 ** rng.uniform(-6.0, -5.2),
        toe=rng.uniform(0.0, 3e-4),
        toe_stress=0.5e6,
        fracture=int(rng.integers(30)),
        still=int(rng.integers(40)),
    )
    return Made(recorded(metal, plan, rng), BY_EXTENSION, None)


def clean_by_crosshead(rng: np.random.Generator) -> Made:
    return Made(recorded(STEEL, NOISY, rng, _through_machine), BY_CROSSHEAD, None)


def grip_slip(rng: np.random.Generator) -> Made:
    """The jaws give way: the force drops within two points, the extensometer goes back."""
    size, at = rng.uniform(0.04, 0.25), rng.uniform(0.3, 0.9)

    def change(s: FloatArray, e: FloatArray) -> tuple[FloatArray, FloatArray]:
        place = int(np.searchsorted(e, at * e[np.argmax(s)]))
        drop = size * s[place]
        down, up = np.array([0.5, 1.0]) * drop, np.linspace(1.0, 0.02, 30) * drop
        fall = np.concatenate([down, up])
        s_slip, e_slip = s[place] - fall, e[place] - fall / STEEL.slope
        return np.insert(s, place + 1, s_slip), np.insert(e, place + 1, e_slip)

    return Made(recorded(STEEL, NOISY, rng, change), BY_EXTENSION, FaultKind.GRIP_SLIP)


def grip_slip_by_crosshead(rng: np.random.Generator) -> Made:
    """The same seen by the crosshead, which travels on while the force drops."""
    size, at = rng.uniform(0.04, 0.25), rng.uniform(0.3, 0.9)

    def change(s: FloatArray, e: FloatArray) -> tuple[FloatArray, FloatArray]:
        s, e = _through_machine(s, e)
        place = int(np.searchsorted(e, at * e[np.argmax(s)]))
        fall = size * s[place] * np.concatenate([[0.5, 1.0], np.linspace(1.0, 0.02, 30)])
        slip = size * s[place] * 1.5e-11  # travel that the slip took up
        back = size * s[place] * np.concatenate([[0.0, 0.0], np.linspace(0.0, 0.98, 30)])
        e_slip = e[place] + slip + back * (1.0 / STEEL.slope + MACHINE)
        e = np.concatenate([e[: place + 1], e_slip, e[place + 1 :] + e_slip[-1] - e[place]])
        return np.insert(s, place + 1, s[place] - fall), e

    return Made(recorded(STEEL, NOISY, rng, change), BY_CROSSHEAD, FaultKind.GRIP_SLIP)


def slow_slip_by_crosshead(rng: np.random.Generator) -> Made:
    """The jaws creep at one force in the elastic part, and hold again."""
    size, at = rng.uniform(0.006, 0.02), rng.uniform(0.4, 0.85)

    def change(s: FloatArray, e: FloatArray) -> tuple[FloatArray, FloatArray]:
        s, e = _through_machine(s, e)
        place = int(np.searchsorted(s, at * STEEL.slope * STEEL.limit))
        creep = e[place] + np.linspace(0.0, size, 300)
        e = np.concatenate([e[: place + 1], creep, e[place + 1 :] + size])
        return np.insert(s, place + 1, np.full(300, s[place])), e

    return Made(recorded(STEEL, NOISY, rng, change), BY_CROSSHEAD, FaultKind.GRIP_SLIP)


def extensometer_slip(rng: np.random.Generator) -> Made:
    """A knife edge jumps along the coupon."""
    size = rng.uniform(0.0006, 0.004) * rng.choice([-1.0, 1.0])
    at = rng.uniform(0.02, 0.8)

    def change(s: FloatArray, e: FloatArray) -> tuple[FloatArray, FloatArray]:
        place = int(at * s.size)
        return s, e + size * (np.arange(e.size) > place)

    may = frozenset({FaultKind.ENDS_BEFORE_YIELD, FaultKind.SLOPE_IMPOSSIBLE})
    made = recorded(COPPER, NOISY, rng, change)
    return Made(made, BY_EXTENSION, FaultKind.EXTENSOMETER_SLIP, may)


def extensometer_off(rng: np.random.Generator) -> Made:
    """It is taken off before the greatest force, and reads what it reads then."""
    at, falls = rng.uniform(0.45, 0.75), bool(rng.integers(2))

    def change(s: FloatArray, e: FloatArray) -> tuple[FloatArray, FloatArray]:
        place = int(at * s.size)
        after = rng.uniform(0.0, 0.02) if falls else e[place]
        return s, np.where(np.arange(e.size) > place, after, e)

    made = recorded(STEEL, NOISY, rng, change)
    return Made(made, BY_EXTENSION, FaultKind.EXTENSOMETER_OFF)


def saturation(rng: np.random.Generator) -> Made:
    """The amplifier's range ends below the greatest force."""
    curve = recorded(STEEL, NOISY, rng)
    assert curve.force is not None
    most = rng.uniform(0.8, 0.97) * STEEL.strength * GEOMETRY.area
    made = replace(curve, force=np.minimum(curve.force, most))
    return Made(made, BY_EXTENSION, FaultKind.SATURATION)


def time_backward(rng: np.random.Generator) -> Made:
    curve = recorded(STEEL, NOISY, rng)
    assert curve.time is not None
    time = curve.time.copy()
    time[int(rng.integers(100, time.size - 100)) :] -= rng.uniform(0.2, 5.0)
    return Made(replace(curve, time=time), BY_EXTENSION, FaultKind.TIME_BACKWARD)


def time_standing(rng: np.random.Generator) -> Made:
    curve = recorded(STEEL, NOISY, rng)
    assert curve.time is not None
    time = curve.time.copy()
    first = int(rng.integers(100, time.size - 100))
    time[first : first + int(rng.integers(6, 60))] = time[first]
    return Made(replace(curve, time=time), BY_EXTENSION, FaultKind.TIME_STANDING)


def unloading_loop(rng: np.random.Generator) -> Made:
    """Somebody unloads to a part of the force, and loads again."""
    depth, at = rng.uniform(0.15, 0.9), rng.uniform(0.25, 0.9)

    def change(s: FloatArray, e: FloatArray) -> tuple[FloatArray, FloatArray]:
        place = int(np.searchsorted(e, at * e[np.argmax(s)]))
        part = np.concatenate([np.linspace(0.0, 1.0, 60), np.linspace(1.0, 0.0, 60)])
        fall = depth * s[place] * part
        s_loop, e_loop = s[place] - fall, e[place] - fall / STEEL.slope
        return np.insert(s, place + 1, s_loop), np.insert(e, place + 1, e_loop)

    return Made(recorded(STEEL, NOISY, rng, change), BY_EXTENSION, FaultKind.UNLOADING_LOOP)


def serrations(rng: np.random.Generator) -> Made:
    """Portevin and Le Chatelier: the stress drops and climbs back, again and again."""
    size, period = rng.uniform(0.01, 0.03), rng.uniform(0.003, 0.01)

    def change(s: FloatArray, e: FloatArray) -> tuple[FloatArray, FloatArray]:
        phase = (e / period) % 1.0
        on = (e > 0.03) & (e < 0.20)
        return np.where(on, s * (1.0 - size * (1.0 - phase)), s), e

    may = frozenset({FaultKind.NO_MAXIMUM})
    made = recorded(POWER, NOISY, rng, change)
    return Made(made, BY_EXTENSION, FaultKind.SERRATIONS, may)


def lueders(rng: np.random.Generator) -> Made:
    """A yield point and a band that runs through at one stress."""
    length, peak = rng.uniform(0.008, 0.03), rng.uniform(0.02, 0.12)

    def change(s: FloatArray, e: FloatArray) -> tuple[FloatArray, FloatArray]:
        return with_yield_point(s, e, length, peak)

    return Made(recorded(STEEL, NOISY, rng, change), BY_EXTENSION, FaultKind.LUEDERS_PLATEAU)


def with_yield_point(
    s: FloatArray, e: FloatArray, length: float, peak: float
) -> tuple[FloatArray, FloatArray]:
    """Steel's curve with an elastic overshoot, and a plateau at the stress of its end."""
    level = float(np.interp(STEEL.limit + length, e, s))
    upper = level * (1.0 + peak)
    first = upper / STEEL.slope
    elastic = np.linspace(0.0, first, 400)
    flat = np.linspace(first + 2e-5, STEEL.limit + length, 1500)
    fall = (upper - level) * np.exp(-(flat - first) / 2e-4)
    rest = e > STEEL.limit + length
    stress = np.concatenate([STEEL.slope * elastic, level + fall, s[rest]])
    return stress, np.concatenate([elastic, flat, e[rest]])


def few_elastic_points(rng: np.random.Generator) -> Made:
    plan = replace(NOISY, elastic=int(rng.integers(10, 20)))
    return Made(recorded(STEEL, plan, rng), BY_EXTENSION, FaultKind.FEW_ELASTIC_POINTS)


def ends_before_yield(rng: np.random.Generator) -> Made:
    """The record ends in the elastic part, or just past its limit."""
    at = rng.uniform(0.5, 1.6) * STEEL.limit

    def change(s: FloatArray, e: FloatArray) -> tuple[FloatArray, FloatArray]:
        return s[e < at], e[e < at]

    plan = replace(NOISY, fracture=0)
    made = recorded(STEEL, plan, rng, change)
    return Made(made, BY_EXTENSION, FaultKind.ENDS_BEFORE_YIELD)


def kilonewton(rng: np.random.Generator) -> Made:
    """The force in kN, read as N."""
    curve = recorded(STEEL, NOISY, rng)
    assert curve.force is not None
    may = frozenset({FaultKind.SLOPE_IMPOSSIBLE})
    made = replace(curve, force=curve.force / 1000.0)
    return Made(made, BY_EXTENSION, FaultKind.STRESS_IMPOSSIBLE, may)


def per_cent(rng: np.random.Generator) -> Made:
    """The strain in per cent, read as a ratio."""
    curve = recorded(STEEL, NOISY, rng)
    assert curve.length is not None
    made = replace(curve, length=curve.length * 100.0)
    may = frozenset({FaultKind.EXTENSOMETER_SLIP})
    return Made(made, BY_EXTENSION, FaultKind.SLOPE_IMPOSSIBLE, may)


def zero_offset(rng: np.random.Generator) -> Made:
    curve = recorded(STEEL, NOISY, rng)
    assert curve.force is not None
    off = rng.uniform(0.05, 0.2) * rng.choice([-1.0, 1.0]) * STEEL.strength * GEOMETRY.area
    return Made(replace(curve, force=curve.force + off), BY_EXTENSION, FaultKind.ZERO_OFFSET)


def no_maximum(rng: np.random.Generator) -> Made:
    """The test was stopped while the force still rose."""
    plan = replace(NOISY, end=rng.uniform(0.3, 0.8), fracture=0)
    return Made(recorded(COPPER, plan, rng), BY_EXTENSION, FaultKind.NO_MAXIMUM)


PLANTED: Final[Mapping[str, Callable[[np.random.Generator], Made]]] = {
    "grip slip": grip_slip,
    "grip slip, crosshead": grip_slip_by_crosshead,
    "slow slip, crosshead": slow_slip_by_crosshead,
    "extensometer slip": extensometer_slip,
    "extensometer off": extensometer_off,
    "saturation": saturation,
    "time backward": time_backward,
    "time standing": time_standing,
    "unloading loop": unloading_loop,
    "serrations": serrations,
    "lueders plateau": lueders,
    "few elastic points": few_elastic_points,
    "ends before yield": ends_before_yield,
    "kN as N": kilonewton,
    "per cent as ratio": per_cent,
    "zero offset": zero_offset,
    "no maximum": no_maximum,
}
CLEAN: Final[Mapping[str, Callable[[np.random.Generator], Made]]] = {
    "copper": lambda rng: clean(COPPER, rng),
    "rolled copper": lambda rng: clean(ROLLED_COPPER, rng),
    "steel": lambda rng: clean(STEEL, rng),
    "power law": lambda rng: clean(POWER, rng),
    "steel, crosshead": clean_by_crosshead,
    "any, to its break": clean_to_the_break,
}


def _through_machine(s: FloatArray, e: FloatArray) -> tuple[FloatArray, FloatArray]:
    return s, e + s * MACHINE


__all__ = ["CLEAN", "PLANTED", "Made", "Plan", "with_yield_point"]
