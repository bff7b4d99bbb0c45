"""The states of a coupon in the furnace: what drives its boundaries, and what is left of it.

Three states follow on one another. Cold-worked: the stored energy drives, particles and
curvature hold. Recovered: the schedule has lowered the dislocation stress, and the stored
energy with its square. Annealed: a fraction X of that has recrystallised, and holds no
dislocations any more. Beside them stand time at one temperature and temperature for one time.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.formulas.annealing import (
    CRITICAL_BULGE_RADIUS,
    CURVATURE_PRESSURE,
    NET_PRESSURE,
    ZENER_PRESSURE,
)
from coldwork.formulas.constants import AVOGADRO_CONSTANT
from coldwork.formulas.recovery import (
    RECOVERED_ENERGY,
    RecoveryLaw,
    recovered_stress,
    recovered_stress_sensitivities,
)
from coldwork.formulas.recrystallisation import (
    RECRYSTALLISATION_RATE,
    TEMPERATURE_FOR_FRACTION,
    TIME_FOR_FRACTION,
    schedule_progress,
    schedule_progress_sensitivities,
)
from coldwork.formulas.schedule import Schedule, schedule
from coldwork.formulas.stored_energy import STORED_ENERGY_SPECIFIC, TEMPERATURE_RISE
from coldwork.interval.onward import Onward
from coldwork.measured import Measured, Value, apply, value_of

__all__ = ["ENERGY", "REACTION", "RECOVERED", "STRESS", "Row", "States", "reaction_of"]

ENERGY: Final = "stored energy"  # names of the pivots
STRESS: Final = "dislocation stress"
RECOVERED: Final = "recovered energy"
REACTION: Final = "reaction"
_MISSING: Final = np.float64(np.nan)
_RECOVERY: Final = {  # attribute of the law: key, what its number is divided by
    "activation_energy": ("recovery.activation_energy_kj_per_mol", AVOGADRO_CONSTANT),
    "activation_volume": ("recovery.activation_volume_nm3", 1.0),
    "taylor_factor": ("recovery.taylor_factor", 1.0),
    "coefficient": ("recovery.coefficient", 1.0),
    "youngs_modulus": ("recovery.youngs_modulus_gpa", 1.0),
    "attempt_frequency": ("recovery.attempt_frequency_per_s", 1.0),
}


@dataclass(frozen=True)
class Row:
    """What a row of the table is about.

    Attributes
    ----------
    state, quantity : str
        As the table's contract has them.
    fraction : float, optional
        Recrystallised fraction that is asked for. [1]
    kelvin, seconds : float, optional
        Temperature or time at which. [K], [s]
    """

    state: str
    quantity: str
    fraction: float | None = None
    kelvin: float | None = None
    seconds: float | None = None


@dataclass(frozen=True)
class States:
    """All that states are computed from. SI.

    Attributes
    ----------
    numbers : mapping of str to Value
        Of the furnace file, the library and the batch, by name.
    energy, stress : Measured, shape (n,)
        Stored energy, and the dislocation stress that goes with it. [J/m^3], [Pa]
    heating : Schedule or None
        Temperature over time.
    hold_temperature : float or None
        At which times are told. [K]
    hold_time : float
        For which temperatures are told. [s]
    fractions : tuple of float
        To which. [1]
    solved : dict
        Stresses after recovery that were solved for already, by the bytes of those before.
    """

    numbers: Mapping[str, Value]
    energy: Measured
    stress: Measured
    heating: Schedule | None
    hold_temperature: float | None
    hold_time: float
    fractions: tuple[float, ...]
    solved: dict[bytes, tuple[NDArray[np.float64], dict[str, NDArray[np.float64]]]] = field(
        default_factory=dict, compare=False, repr=False
    )

    @property
    def recovers(self) -> bool:
        """Whether recovery can be predicted."""
        keys = [key for key, _ in _RECOVERY.values()]
        return self.heating is not None and all(key in self.numbers for key in keys)

    @property
    def has_kinetics(self) -> bool:
        """Whether constants of recrystallisation are there."""
        return "recrystallisation.exponent" in self.numbers

    def _solved(
        self, before: NDArray[np.float64], law: RecoveryLaw
    ) -> tuple[NDArray[np.float64], dict[str, NDArray[np.float64]]]:
        """Solve the law for stresses and slopes, once for the same stresses. [Pa]."""
        key = before.tobytes()
        if key not in self.solved:
            stress = np.where(before > 0.0, before, np.nan)
            heating = schedule([0.0, 0.0], [1.0, 1.0]) if self.heating is None else self.heating
            after = np.where(before == 0.0, 0.0, recovered_stress(stress, heating, law))
            self.solved[key] = after, recovered_stress_sensitivities(stress, heating, law)
        return self.solved[key]

    @property
    def boundary_energy(self) -> Value | None:
        """Of the boundary that moves. [J/m^2]."""
        return self.numbers.get("boundary.energy_j_per_m2")

    @cached_property
    def energy_at_unit_stress(self) -> Measured:
        """Stored energy over the square of the stress. [J/(m^3.Pa^2)]."""
        u, s = self.energy, self.stress.where(self.stress.value > 0.0)
        value = u.value / s.value**2
        total = {name: c / s.value**2 for name, c in u.sensitivities.items()}
        for name, c in s.sensitivities.items():
            step = -2.0 * value / s.value * c
            total[name] = total[name] + step if name in total else step
        return Measured(value, total)

    @cached_property
    def drags(self) -> dict[str, Value]:
        """Pressures of particles and of curvature, where they can be told. [Pa]."""
        gamma, found = self.boundary_energy, {}
        if gamma is not None and "particles.fraction" in self.numbers:
            found["zener_pressure_mpa"] = apply(
                ZENER_PRESSURE,
                volume_fraction=self.numbers["particles.fraction"],
                particle_radius=self.numbers["particles.radius_nm"],
                boundary_energy=gamma,
            )
        if gamma is not None and "boundary.curvature_radius_um" in self.numbers:
            found["curvature_pressure_mpa"] = apply(
                CURVATURE_PRESSURE,
                boundary_energy=gamma,
                radius=self.numbers["boundary.curvature_radius_um"],
            )
        return found

    def stress_after(self, before: Value) -> Measured:
        """Compute the dislocation stress that recovery leaves. [Pa]."""
        given = {a: (self.numbers[key], over) for a, (key, over) in _RECOVERY.items()}
        law = RecoveryLaw(**{a: float(value_of(x)) / over for a, (x, over) in given.items()})
        after, slopes = self._solved(value_of(before), law)
        total: dict[str, NDArray[np.float64]] = {}
        if isinstance(before, Measured):
            total = {name: slopes["stress"] * c for name, c in before.sensitivities.items()}
        for attribute, (x, over) in given.items():
            for name, c in x.sensitivities.items() if isinstance(x, Measured) else ():
                total[name] = total.get(name, np.float64(0.0)) + slopes[attribute] * c / over
        return Measured(after, total)

    def recovery(self, at: Mapping[str, Value]) -> dict[Row, Onward]:
        """Compute what recovery leaves from the pivot `STRESS`, shape (n,). SI."""
        after = self.stress_after(at[STRESS])
        left = apply(
            RECOVERED_ENERGY,
            stored_energy=self.energy_at_unit_stress,
            stress_before=1.0,
            stress_after=after,
        )
        return {
            Row("recovered", "dislocation_stress_mpa"): Onward(after),
            Row("recovered", "driving_pressure_mpa"): Onward(left),
        }

    def work(self, at: Mapping[str, Value]) -> dict[Row, Onward]:
        """Compute every state from the pivots' values. SI.

        Parameters
        ----------
        at : mapping of str to Value
            `ENERGY` [J/m^3]; `RECOVERED` [J/m^3] and `STRESS` [Pa] where recovery is
            predicted; `REACTION` where kinetics are known; shape (n,) each.

        Returns
        -------
        dict of Row to Onward
            In the order of the table.
        """
        stored = at[ENERGY]
        rows = self._pressures("cold-worked", stored) | self._energies("cold-worked", stored)
        left: Value = stored
        share: Value = np.float64(1.0)
        if RECOVERED in at:
            left = at[RECOVERED]
            share = _share(at[STRESS], self.stress_after(at[STRESS]))
            rows |= self._pressures("recovered", left)
            rows |= self._energies("recovered", left, stored * (1.0 - share))
        if REACTION in at:
            rest = _remaining(at[REACTION])
            rows[Row("annealed", "recrystallised_fraction")] = Onward(at[REACTION], "fraction")
            rows |= self._energies("annealed", rest * left, stored * (1.0 - rest * share))
        return rows | (self._holding() if self.has_kinetics else {})

    def _pressures(self, state: str, drive: Value) -> dict[Row, Onward]:
        rows = {"driving_pressure_mpa": Onward(drive)}
        if state == "cold-worked":
            rows |= {name: Onward(drag) for name, drag in self.drags.items()}
        nothing = np.float64(0.0)
        zener = self.drags.get("zener_pressure_mpa", nothing)
        curvature = self.drags.get("curvature_pressure_mpa", nothing)
        held = [drive]
        for pull in (nothing, curvature):
            net = apply(
                NET_PRESSURE, driving_pressure=drive, zener_pressure=zener, curvature_pressure=pull
            )
            held.append(net)
        rows["net_pressure_mpa"] = Onward(held[-1], "plain")
        if self.boundary_energy is not None:
            names = ("critical_radius_um", "critical_radius_particles_um", "critical_radius_net_um")
            for name, pressure in zip(names, held, strict=True):
                size = apply(
                    CRITICAL_BULGE_RADIUS,
                    boundary_energy=self.boundary_energy,
                    net_pressure=pressure,
                )
                rows[name] = Onward(size)
        return {Row(state, name): one for name, one in rows.items()}

    def _energies(self, state: str, left: Value, gone: Value | None = None) -> dict[Row, Onward]:
        mass = self.numbers["material.mass_density_kg_per_m3"]
        rows = {
            "stored_energy_j_per_g": apply(
                STORED_ENERGY_SPECIFIC, stored_energy=left, mass_density=mass
            )
        }
        if gone is not None:
            rows["released_j_per_g"] = apply(
                STORED_ENERGY_SPECIFIC, stored_energy=gone, mass_density=mass
            )
            rows["adiabatic_rise_k"] = apply(
                TEMPERATURE_RISE,
                stored_energy=gone,
                mass_density=mass,
                heat_capacity=self.numbers.get("material.heat_capacity_j_per_kg_k", _MISSING),
            )
        return {Row(state, name): Onward(x) for name, x in rows.items()}

    def _holding(self) -> dict[Row, Onward]:
        n, b, q = (self.numbers[f"recrystallisation.{key}"] for key in _KINETICS)
        rows = {}
        for x in self.fractions:
            if self.hold_temperature is not None:
                rate = apply(
                    RECRYSTALLISATION_RATE,
                    prefactor=b,
                    activation_energy=q,
                    temperature=self.hold_temperature,
                )
                time = apply(TIME_FOR_FRACTION, fraction=x, rate=rate, exponent=n)
                rows[Row("holding", "time_s", x, kelvin=self.hold_temperature)] = Onward(time)
            kelvin = apply(
                TEMPERATURE_FOR_FRACTION,
                fraction=x,
                time=self.hold_time,
                prefactor=b,
                activation_energy=q,
                exponent=n,
            )
            row = Row("holding", "temperature_c", x, seconds=self.hold_time)
            rows[row] = Onward(kelvin, "plain")
        return rows


_KINETICS: Final = ("exponent", "prefactor_per_s", "activation_energy_kj_per_mol")


def reaction_of(numbers: Mapping[str, Value], furnace: Schedule) -> Measured:
    """Compute ln(-ln(1 - X)) at the end of a schedule: n ln of the progress.

    Parameters
    ----------
    numbers : mapping of str to Value
        With the three constants of recrystallisation. [SI]
    furnace : Schedule
        Temperature over time. [K], [s]

    Returns
    -------
    Measured, shape ()
        With its sensitivities. [1]
    """
    n, b, q = (numbers[f"recrystallisation.{key}"] for key in _KINETICS)
    plain = (value_of(b), value_of(q))
    progress = schedule_progress(furnace, *plain)
    slopes = schedule_progress_sensitivities(furnace, *plain)
    total: dict[str, NDArray[np.float64]] = {}
    with np.errstate(divide="ignore", invalid="ignore"):
        for key, x in (("prefactor", b), ("activation_energy", q)):
            for name, c in x.sensitivities.items() if isinstance(x, Measured) else ():
                total[name] = total.get(name, np.float64(0.0)) + slopes[key] * c / progress
        return Measured(np.log(progress), total) * n


def _share(before: Value, after: Measured) -> Value:
    """Give the share of the stored energy that recovery leaves: all of it at no stress."""
    stress = value_of(before)
    some = before if isinstance(before, Measured) else np.where(stress == 0.0, np.nan, stress)
    share = apply(RECOVERED_ENERGY, stored_energy=1.0, stress_before=some, stress_after=after)
    slopes = share.sensitivities if isinstance(share, Measured) else {}
    whole = np.minimum(value_of(share), 1.0)  # the solver's last digit may lie above
    return Measured(np.where(stress == 0.0, 1.0, whole), slopes)


def _remaining(reaction: Value) -> Value:
    """Give 1 - X."""
    g = value_of(reaction)
    with np.errstate(over="ignore"):
        power = np.exp(g)
        left = np.exp(-power)
        slope = np.where(left > 0.0, -power * left, 0.0)
    if not isinstance(reaction, Measured):
        return left
    return Measured(left, {name: slope * c for name, c in reaction.sensitivities.items()})
