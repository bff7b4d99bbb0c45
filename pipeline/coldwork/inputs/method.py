"""The method that a batch is worked by: laws by name, inputs by name, limits.

Frozen and plain: nothing here reads a file. `coldwork.inputs.sheet` makes it.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date
from pathlib import Path

from coldwork.formulas.slip_systems import SlipSystem
from coldwork.inputs.calibration import Calibration
from coldwork.inputs.layout import Layout
from coldwork.inputs.quantity import Input

__all__ = ["DayCheck", "Draws", "Laws", "Limit", "Method", "Tensile", "Tester"]


@dataclass(frozen=True)
class Laws:
    """The choices that the sheet makes by name; no physical constants.

    Attributes
    ----------
    route : str
        ``indent`` or ``flow``.
    area : mapping of str to str
        Scale (``HV``, ``HBW``, ``HK``) to the area that its pressure is taken
        over, ``contact`` or ``projected``.
    unwinding : bool
        Whether theta_0 and sigma_s were given, so that the indent's own strain
        is taken out.
    baseline : str
        ``given`` as one number, or ``parts``.
    taylor : str
        ``constant`` alpha, ``logarithmic`` or ``logarithmic-inner``; ``slope`` where
        M alpha G b was given as one.
    elasticity : str
        ``isotropic`` or ``anisotropic``.
    outer_radius : str
        ``spacing``, ``half-spacing``, ``grain``, ``fixed`` or ``arrangement``.
    angles_deg, fractions : tuple of float
        The character mix; empty if `uniform_mix`. [deg], [1]
    uniform_mix : bool
        Whether every angle is alike.
    flow_from : str
        What gives the flow stress: ``points`` or ``curves``; empty by the indent route.
    slip : SlipSystem or None
        Whose lines are meant, where elasticity is anisotropic.
    hexagonal : bool
        Whether the crystal is hexagonal and not cubic.
    superposed : bool
        Whether an obstacle stress joins the dislocation stress.
    structure : str
        ``uniform``, or ``cells`` with walls and interiors of their own density.
    core : str
        Where the core's energy comes from: the ``sheet`` or the ``library``.
    temperature : str
        How a strength is brought to the reference temperature: ``none``, ``modulus`` or
        ``modulus-and-thermal``.
    size_effect : str
        What is taken out of small Vickers indents: ``none``, the ``fitted`` effect of each
        condition, or that of a characteristic ``length`` or of a ``strength``.
    prior_work : str
        Where the work of the prior deformation comes from: ``stated``, or a ``voce`` curve
        where none is.
    """

    route: str
    area: Mapping[str, str]
    unwinding: bool
    baseline: str
    taylor: str
    elasticity: str
    outer_radius: str
    angles_deg: tuple[float, ...]
    fractions: tuple[float, ...]
    uniform_mix: bool
    flow_from: str = ""
    slip: SlipSystem | None = None
    hexagonal: bool = False
    superposed: bool = False
    structure: str = "uniform"
    core: str = "sheet"
    temperature: str = "none"
    size_effect: str = "none"
    prior_work: str = "stated"


@dataclass(frozen=True)
class Draws:
    """How Monte Carlo draws.

    Attributes
    ----------
    seed : int
        Decides every draw, together with the names of inputs and coupons.
    number : int
        How many draws; where they are adaptive, the most of one coupon.
    adaptive : bool
        Whether each coupon stops when more draws would not change the digits that count.
    digits : int
        Digits of a standard uncertainty that count.
    """

    seed: int
    number: int
    adaptive: bool
    digits: int

    @staticmethod
    def least(coverage: float) -> float:
        """Give how many draws an interval needs, 100 / (1 - coverage) (JCGM 101, 7.9.4)."""
        return 100.0 / (1.0 - coverage)


@dataclass(frozen=True)
class DayCheck:
    """One check of a tester on a reference block.

    Attributes
    ----------
    day : date
        In the batch's zone.
    within : bool
        Whether bias and repeatability are inside the tester's limits.
    """

    day: date
    within: bool


@dataclass(frozen=True)
class Tester:
    """A hardness tester or testing machine with what its calibration found.

    Attributes
    ----------
    id : str
        Its name as the readings give it.
    bias : Input
        How much too high it reads, relative. [1]
    valid_until : date or None
        Last day of its calibration, if one was said.
    checked : bool
        Whether its bias is that of its daily checks; until those are read it is 0.
    max_bias, max_repeatability : float
        Limits of one check, relative. [1]
    max_age_days : int
        For how many days a check speaks for it.
    checks : tuple of DayCheck
        By day; two blocks on one day are two checks.
    """

    id: str
    bias: Input
    valid_until: date | None
    checked: bool = False
    max_bias: float = 0.03
    max_repeatability: float = 0.05
    max_age_days: int = 7
    checks: tuple[DayCheck, ...] = ()


@dataclass(frozen=True)
class Limit:
    """A limit that coupons are held against.

    Attributes
    ----------
    id : str
        Its name.
    quantity : str
        Column of the results' ``coupons.csv``.
    lower, upper : float or None
        At least one of them. [unit of the quantity's column]
    rule : str
        ``guarded``, ``probability`` or ``simple``.
    basis : str
        ``total``, or ``own`` for limits set with this same method and constants.
    at_least : float or None
        For ``probability``: conforming from here. [1]
    max_relative_u : float or None
        For ``simple``: largest standard uncertainty over value. [1]
    """

    id: str
    quantity: str
    lower: float | None
    upper: float | None
    rule: str
    basis: str
    at_least: float | None
    max_relative_u: float | None


@dataclass(frozen=True)
class Tensile:
    """How curves are reduced; the numbers with uncertainty are inputs of the method.

    Attributes
    ----------
    mode : str
        ``tension`` or ``compression``.
    strain_from : str or None
        ``extension`` or ``crosshead``, where curves bring force and length.
    stress_is : str or None
        ``engineering`` or ``true``, where curves bring stress and strain.
    slope_between : tuple of float
        Range of the elastic fit, as fractions of the 0.2 % proof stress. [1]
    offsets : tuple of float
        Plastic offsets of the proof stresses that are told; 0.002 always is. [1]
    reported_strains : tuple of float
        True plastic strains that ``evolution.csv`` tells, rising. [1]
    fit : tuple of str
        ``voce`` and, or, ``hollomon``.
    fit_between : tuple of float or None
        True plastic strains between which laws are fitted. [1]
    bridgman : bool
        Whether the stress at fracture is told from the measured neck.
    curve_points : bool
        Whether ``curve_points.parquet`` is written.
    """

    mode: str
    strain_from: str | None
    stress_is: str | None
    slope_between: tuple[float, float]
    offsets: tuple[float, ...]
    reported_strains: tuple[float, ...]
    fit: tuple[str, ...]
    fit_between: tuple[float, float] | None
    bridgman: bool
    curve_points: bool


@dataclass(frozen=True)
class Method:
    """Everything that a batch sheet says, checked and complete.

    Attributes
    ----------
    folder : Path
        The batch folder.
    batch_id : str
        One path component.
    laboratory, operator : str or None
        As written.
    timezone : str
        Zone of times that name none.
    material : str
        Library entry or new name.
    lattice : str or None
        ``fcc``, ``bcc`` or ``hcp``.
    edge_distance_d, centre_distance_d : float
        Least distance of an indent from an edge and from the next indent, in
        mean diagonals. [1]
    coupons, indents, flow_stress : tuple of Path
        The tables' files in order, all inside the batch folder.
    exclusions : tuple of Path
        The files of the readings that a person takes out.
    verification : tuple of Path
        The file of the testers' daily checks.
    laws : Laws
        The choices by name.
    inputs : mapping of str to Input
        Every number that the laws use, exact ones too, ``tester:ID`` and the components
        ``calibration:ID:1`` of constants that were calibrated together.
    testers : tuple of Tester
        In the sheet's order.
    limits : tuple of Limit
        In the sheet's order.
    plastic_strain : float
        The state that the flow route reports. [1]
    repeatability_rel : float or None
        Of one flow-stress point, where points are not repeated. [1]
    resolution : float or None
        Of a diagonal. [m]
    repeatability : str
        ``pooled`` or ``own``.
    coverage : float
        Probability that an interval is meant to hold. [1]
    test_temperature, reference_temperature : float
        Where a reading does not say, and where the shear modulus holds. [K]
    tables : tuple of str
        ``csv`` and ``parquet`` as asked.
    detail : str
        ``full`` or ``summary``.
    sheets : tuple of (str, str)
        Path as the sheet names it, and SHA-256, of ``batch.toml``, of what it builds on
        and of the calibrations that it takes numbers from.
    document : mapping of str to object
        Content of ``method.json``, ready to dump.
    curves : tuple of Path
        Files of tensile or compression curves; by the indent route they stand beside it.
    tensile : Tensile or None
        How those are reduced.
    draws : Draws or None
        How Monte Carlo draws; None by first order.
    layouts : mapping of str to tuple of (Layout or None)
        By table: how each of its files is written, None for the tidy form.
    calibrations : tuple of Calibration
        Those that numbers are taken from.
    mixes : mapping of str to mapping of str to float
        By input: its sensitivities to components, where it was calibrated with others. [SI]
    both : bool
        Whether flow curves are read beside the indents and joined with them; the laws are
        those of the indents then.
    """

    folder: Path
    batch_id: str
    laboratory: str | None
    operator: str | None
    timezone: str
    material: str
    lattice: str | None
    edge_distance_d: float
    centre_distance_d: float
    coupons: tuple[Path, ...]
    indents: tuple[Path, ...]
    flow_stress: tuple[Path, ...]
    exclusions: tuple[Path, ...]
    laws: Laws
    inputs: Mapping[str, Input]
    testers: tuple[Tester, ...]
    limits: tuple[Limit, ...]
    plastic_strain: float
    repeatability_rel: float | None
    resolution: float | None
    repeatability: str
    coverage: float
    test_temperature: float
    reference_temperature: float
    tables: tuple[str, ...]
    detail: str
    sheets: tuple[tuple[str, str], ...]
    document: Mapping[str, object]
    curves: tuple[Path, ...] = ()
    tensile: Tensile | None = None
    draws: Draws | None = None
    layouts: Mapping[str, tuple[Layout | None, ...]] = field(default_factory=dict)
    calibrations: tuple[Calibration, ...] = ()
    verification: tuple[Path, ...] = ()
    mixes: Mapping[str, Mapping[str, float]] = field(default_factory=dict)
    both: bool = False

    @property
    def route(self) -> str:
        """The route that the sheet names: ``indent``, ``flow`` or ``both``."""
        return "both" if self.both else self.laws.route

    @property
    def used_layouts(self) -> tuple[Layout, ...]:
        """Every layout that a file is read through, once each."""
        all_of_them = (layout for table in self.layouts.values() for layout in table if layout)
        return tuple({layout.path: layout for layout in all_of_them}.values())
