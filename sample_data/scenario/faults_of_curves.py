"""Planted faults, ninth and tenth batch: curves of strips pulled, and of pieces pressed."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from scenario.copper_tension import MODULUS, SEATED, TOE, Strip, points
from scenario.planting import Fault
from scenario.tables import Table, normals

__all__ = ["Pulled", "pressed_batch", "pulled_batch"]

Floats = NDArray[np.float64]

_LENGTH: Final = 50.0  # of the extensometer [mm]
_AREA: Final = 20.0  # [mm2]
_LOAD_NOISE: Final = 0.4  # [N]
_STRETCH_NOISE: Final = 0.1e-3  # [mm]
_COLUMNS: Final = ("coupon_id", "time_s", "force_n", "extension_mm")

_SHEET: Final = """\
# Planted faults {number} (see ../FAULTS.csv): {what}

[batch]
id = "PF-{number}"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
curves = "curves.csv"

[strength]
route = "flow"
baseline_mpa = {{ value = 50.0, u = 5.0 }}

[tensile]
mode = "{mode}"
strain_from = "extension"
reported_strains = [0.002, 0.05]
force_u_rel = 0.0029
"""


@dataclass(frozen=True)
class _Test:
    """A test as it was recorded: stress [Pa], strain [1], time [s].

    `most` is the greatest stress that shows [Pa]; `units` are what force and extension are
    multiplied by before they are written under the names of newton and millimetre.
    """

    stress: Floats
    strain: Floats
    time: Floats
    most: float = np.inf
    units: tuple[float, float] = (1.0, 1.0)


Change = Callable[[_Test], _Test]


class Pulled:
    """A batch of curves with faults in the making.

    Parameters
    ----------
    folder : str
        Its folder below ``planted-faults``.
    sheet : str
        Its batch sheet.
    seed : int
        Of the noise.
    """

    def __init__(self, folder: str, sheet: str, seed: int) -> None:
        self.faults: list[Fault] = []
        self._folder = folder
        self._sheet = sheet
        self._bits = np.random.PCG64(seed)
        self._coupons = Table(
            (
                *("coupon_id", "lot_id", "condition", "prior_true_strain"),
                *("prior_plastic_work_j_per_m3", "gauge_length_mm", "initial_diameter_mm"),
                *("width_mm", "thickness_mm", "final_diameter_mm"),
            )
        )
        self._curves = Table(_COLUMNS)

    def files(self) -> dict[str, str]:
        """Give path and content of every file of the batch."""
        texts = {
            "batch.toml": self._sheet,
            "coupons.csv": self._coupons.text(),
            "curves.csv": self._curves.text(),
        }
        return {f"planted-faults/{self._folder}/{name}": text for name, text in texts.items()}

    def test(
        self, name: str, made: _Test, cells: dict[str, str], area: float, length: float
    ) -> int:
        """Add a coupon with its curve; tell the line of its first point."""
        usual = {
            "coupon_id": name,
            "lot_id": "shelf",
            "condition": "rolled 10 %",
            "prior_true_strain": "0.1217",
            "prior_plastic_work_j_per_m3": "17270000",
        }
        self._coupons.add(usual | cells)
        noise = normals(self._bits, 2 * made.stress.size).reshape(2, made.stress.size)
        force = made.stress * area * 1e-6 + _LOAD_NOISE * noise[0]
        force = np.minimum(force, made.most * area * 1e-6)
        force = force * made.units[0]
        stretch = (made.strain * length + _STRETCH_NOISE * noise[1]) * made.units[1]
        lines = [
            self._curves.add(
                {
                    "coupon_id": name,
                    "time_s": f"{t:.3f}",
                    "force_n": f"{f:.2f}" if made.units[0] == 1.0 else f"{f:.5f}",
                    "extension_mm": f"{x:.5f}" if made.units[1] == 1.0 else f"{x:.8f}",
                }
            )
            for t, f, x in zip(made.time, force, stretch, strict=True)
        ]
        return lines[0]

    def fault(self, rule: str, name: str, line: int, planted: str) -> None:
        """List a fault at a line of the curves."""
        self.faults.append(Fault(self._folder, name, "", rule, "curves.csv", line, planted))


def pulled_batch() -> Pulled:
    """Make the batch of strips that were pulled."""
    what = (
        "each curve has a fault of the machine, of the\n# test or of its dimensions, or shows "
        "what only the metal does; the first one has none."
    )
    sheet = _SHEET.format(number=9, what=what, mode="tension")
    made = Pulled("curves", sheet, 2026_11_02)
    flat = {"gauge_length_mm": "50.0", "width_mm": "12.50", "thickness_mm": "1.60"}
    made.test("PF9-01", _usual(), flat, _AREA, _LENGTH)
    for number, (rules, planted, change, place) in enumerate(_CHANGES, start=2):
        name = f"PF9-{number:02d}"
        cells = flat | {"gauge_length_mm": ""} if rules[0] == "curve-without-geometry" else flat
        dense = 2.5 if rules[0] in _FINE else 0.7
        line = made.test(name, change(_usual(dense)), cells, _AREA, _LENGTH)
        for rule in rules:
            made.fault(rule, name, line + place, planted)
    return made


def pressed_batch() -> Pulled:
    """Make the batch of pieces that were pressed."""
    what = (
        "pieces pressed between plates, one of\n# them barrelled, one too short; the first "
        "one has no fault."
    )
    sheet = _SHEET.format(number=10, what=what, mode="compression")
    made = Pulled("pressed", sheet, 2026_11_03)
    for name, height, final in (
        ("PF10-01", 15.0, ""),
        ("PF10-02", 15.0, "12.60"),
        ("PF10-03", 5.0, ""),
    ):
        cells = {
            "gauge_length_mm": f"{height:.1f}",
            "initial_diameter_mm": "10.0",
            "final_diameter_mm": final,
        }
        line = made.test(name, _pressed(), cells, np.pi * 25.0, height)
        if final:
            made.fault("barrelling", name, line, "12.6 mm at half height, where 11.6 are even")
        if height < 10.0:
            made.fault("friction", name, line, "half as high as it is wide")
    return made


def _usual(dense: float = 0.7) -> _Test:
    """Pull a strip that was rolled by a tenth."""
    s, e = points(Strip(0.10), dense)
    rate = np.where(e[1:] < 0.01, 0.00025, 0.002)
    time = np.append(0.0, np.cumsum(np.abs(np.diff(e)) / rate + 1e-3))
    return _Test(s, e + TOE * -np.expm1(-s / SEATED), time)


def _pressed() -> _Test:
    """Press the same copper by a quarter: force and extension below zero."""
    strip = Strip(0.10)
    elastic = np.linspace(0.0, 0.98 * strip.elastic, 80)
    plastic = np.concatenate([np.linspace(0.0, 0.006, 50), np.linspace(0.007, 0.3, 120)])
    true = np.array([strip.stress(float(p)) for p in plastic])
    total = plastic + true / MODULUS
    s = np.concatenate([MODULUS * elastic, true * np.exp(total)])
    e = np.concatenate([elastic, -np.expm1(-total)])
    return _Test(-s, -e, np.append(0.0, np.cumsum(np.abs(np.diff(e)) / 0.001 + 1e-3)))


def _few(test: _Test) -> _Test:
    return _Test(test.stress[:8], test.strain[:8], test.time[:8])


def _sparse(test: _Test) -> _Test:
    keep = np.concatenate([np.arange(0, 77, 13), np.arange(77, test.stress.size)])
    return _Test(test.stress[keep], test.strain[keep], test.time[keep])


def _cut(test: _Test, stop: int) -> _Test:
    return _Test(test.stress[:stop], test.strain[:stop], test.time[:stop])


def _insert(test: _Test, at: int, factors: Floats) -> _Test:
    """Let the stress go down and come back along the elastic line, by factors of what it is."""
    load = test.stress[at] * factors
    strain = test.strain[at] + (load - test.stress[at]) / MODULUS
    time = test.time.copy()
    time[at + 1 :] += 0.1 * load.size
    between = test.time[at] + 0.1 * np.arange(1.0, load.size + 1.0)
    return _Test(
        np.insert(test.stress, at + 1, load),
        np.insert(test.strain, at + 1, strain),
        np.insert(time, at + 1, between),
    )


def _slip(test: _Test) -> _Test:
    back = np.concatenate([[0.95, 0.89, 0.84], np.linspace(0.85, 0.9995, 16), np.ones(4)])
    return _insert(test, 700, back)


def _loop(test: _Test) -> _Test:
    return _insert(test, 700, 1.0 - 0.6 * np.sin(np.linspace(0.0, np.pi, 60)))


def _off(test: _Test) -> _Test:
    strain = test.strain.copy()
    strain[210:] = strain[210]
    return replace(test, strain=strain)


def _jump(test: _Test) -> _Test:
    strain = test.strain.copy()
    strain[600:] += 0.003
    return replace(test, strain=strain)


def _backward(test: _Test) -> _Test:
    time = test.time.copy()
    time[180:] -= 3.0
    return replace(test, time=time)


def _standing(test: _Test) -> _Test:
    time = test.time.copy()
    time[160:190] = time[160]
    return replace(test, time=time)


def _serrated(test: _Test) -> _Test:
    stress = test.stress.copy()
    place = np.arange(stress.size)
    on = (place > 540) & (place < 960)
    stress[on] *= 1.0 - 0.02 * (1.0 - (place[on] % 60) / 60.0)
    return replace(test, stress=stress)


def _plateau(test: _Test) -> _Test:
    """Yield at a point 8 % above a plateau of 1.5 %, from which it hardens as before."""
    level, length = 1.0 * test.stress[126], 0.015
    upper = 1.08 * level
    rise = np.linspace(0.0, upper, 80)
    flat = np.linspace(upper / MODULUS + 2e-5, level / MODULUS + length, 120)
    fall = (upper - level) * np.exp(-(flat - flat[0]) / 2e-4)
    rest = test.stress[127:]
    after = test.strain[127:] - test.strain[126] + flat[-1]
    s = np.concatenate([rise, level + fall, rest])
    e = np.concatenate([rise / MODULUS, flat, after])
    return _Test(s, e, np.append(0.0, np.cumsum(np.abs(np.diff(e)) / 0.001 + 1e-3)))


_FINE: Final = ("unloading-loop", "serrations", "extensometer-slip", "grip-slip")  # seen in fine
_CHANGES: Final[tuple[tuple[tuple[str, ...], str, Change, int], ...]] = (
    (("too-few-points",), "the record has eight points", _few, 0),
    (("few-elastic-points",), "six points up to yield", _sparse, 0),
    (("ends-before-yield",), "stopped at 160 MPa", lambda test: _cut(test, 60), 0),
    (
        ("stress-impossible", "slope-impossible"),
        "kilonewton under the name of newton",
        lambda test: replace(test, units=(1e-3, 1.0)),
        0,
    ),
    (
        ("slope-impossible", "ends-before-yield"),
        "extension in metre under the name of millimetre",
        lambda test: replace(test, units=(1.0, 1e-3)),
        0,
    ),
    (("grip-slip",), "the grips gave way once", _slip, 700),
    (("extensometer-slip",), "a knife edge jumped by 0.15 mm", _jump, 598),
    (("extensometer-off",), "the extensometer was lifted off", _off, 210),
    (
        ("saturation",),
        "the amplifier ended at 240 MPa",
        lambda test: replace(test, most=240e6),
        180,
    ),
    (("time-backward",), "the clock was set back by 3 s", _backward, 179),
    (("time-standing",), "thirty points of one time", _standing, 160),
    (("unloading-loop",), "unloaded by six tenths and loaded again", _loop, 700),
    (("serrations",), "seven drops by 2 %", _serrated, 540),
    (("lueders-plateau",), "a plateau of 1.5 %", _plateau, 80),
    (("no-maximum",), "stopped while the force still rose", lambda test: _cut(test, 190), 0),
    (
        ("zero-offset",),
        "the force began at 25 MPa",
        lambda test: replace(test, stress=test.stress + 25e6),
        0,
    ),
    (("curve-without-geometry",), "no gauge length", lambda test: test, 0),
)
