"""From a plan to the parts of its answer.

Each part is a pure function of the plan fields named in its decorator; these fields (and its other arguments) are
the key under which its newest answers are kept. A visible page asks for its parts, a hidden page for none. The
cloud part is cheap enough for the thread that asks; the others are vectorised and belong on the worker thread.
"""

from __future__ import annotations

import math
import threading
from collections import OrderedDict
from collections.abc import Callable, Hashable
from dataclasses import dataclass
from functools import cached_property, wraps
from operator import attrgetter
from typing import TYPE_CHECKING, Any, Concatenate, ParamSpec, TypeVar

import numpy as np
from numpy.typing import NDArray

from app.quantities import QUANTITIES, Need, Row
from physics.caveats import Caveat, caveats_of
from physics.constants import boltzmann
from physics.cloud import Cloud, Equilibrium, Model, equilibrium
from physics.particles import Statistics
from physics.sensitivity import lattice, sample
from physics.profiles import Profile, column_density_profile, density_profile
from physics.scattering import LengthInUse, length_at_field
from physics.species import State, load_species
from physics.traps import HarmonicTrap

if TYPE_CHECKING:
    from app.plan import Plan
    from app.units import Quantity

Array = NDArray[np.float64]
P = ParamSpec("P")
T = TypeVar("T")

MAP_POINTS = 100
SLICE_POINTS = 241
PROFILE_POINTS = 301
SAMPLES = 4096
SEED = 20
_KEPT = 8


def part(*fields: str) -> Callable[
    [Callable[Concatenate[Plan, P], T]], Callable[Concatenate[Plan, P], T]
]:
    """Keep a part's newest answers, keyed by the plan fields that it depends on and its other arguments."""

    def decorate(function: Callable[Concatenate[Plan, P], T]) -> Callable[Concatenate[Plan, P], T]:
        read = attrgetter(*fields)
        kept: OrderedDict[Hashable, T] = OrderedDict()
        lock = threading.Lock()

        @wraps(function)
        def answer(plan: Plan, *args: P.args, **kwargs: P.kwargs) -> T:
            key = (read(plan), args, tuple(sorted(kwargs.items())))
            with lock:
                if key in kept:
                    kept.move_to_end(key)
                    return kept[key]
            value = function(plan, *args, **kwargs)
            with lock:
                kept[key] = value
                if len(kept) > _KEPT:
                    kept.popitem(last=False)
            return value

        return answer

    return decorate


@dataclass(frozen=True, kw_only=True, eq=False)
class CloudAnswer:
    """One cloud: what it is made of, its equilibrium, and what the answer does not cover.

    Numbers are read with `value`, and with `interval` where the plan states uncertainties.
    """

    plan: Plan
    state: State
    cloud: Cloud
    equilibrium: Equilibrium
    scattering: LengthInUse
    caveats: tuple[Caveat, ...]
    efficiency: float | None
    threshold: float

    @property
    def model(self) -> Model:
        """The model used, which may not be the one asked for."""
        return self.equilibrium.model

    @property
    def bosons(self) -> bool:
        return self.cloud.statistics is Statistics.BOSE

    def value(self, name: str) -> float | Array:
        """A quantity by its NAME, in SI; NaN where it does not apply, three values for a quantity with axes."""
        return getattr(self.equilibrium, name)  # type: ignore[no-any-return]

    def missing(self, row: Row) -> Need | None:
        """The first thing that a quantity needs and this cloud does not have."""
        return next((need for need in row.needs if not self._has(need)), None)

    def _has(self, need: Need) -> bool:
        match need:
            case Need.BOSONS:
                return self.bosons
            case Need.FERMIONS:
                return not self.bosons
            case Need.CONDENSATE:
                return self.bosons and float(self.equilibrium.condensate_fraction) > 0.0
            case Need.INTERACTING_CONDENSATE:
                return bool(np.all(np.isfinite(self.equilibrium.condensate_radii)))
            case Need.SCATTERING_LENGTH:
                return self.cloud.scattering_length is not None
            case Need.COLLISIONS:
                return bool(np.isfinite(self.equilibrium.elastic_collision_rate))
            case Need.DEPTH:
                return self.cloud.trap.depth is not None
            case Need.EFFICIENCY:
                return self.efficiency is not None

    @cached_property
    def uncertain(self) -> bool:
        """Whether any number of the plan that enters has an uncertainty."""
        return any(quantity.sigma for quantity in _inputs(self.plan).values())

    @cached_property
    def _sampled(self) -> Equilibrium | None:
        """The same cloud at many draws of its uncertain inputs; None where there are none, or where a model is too
        slow to be sampled."""
        if not self.uncertain or self.model not in (Model.IDEAL, Model.SEMI_IDEAL):
            return None
        drawn = _cloud(self.plan, self.state, self.scattering.value, _draws(self.plan))
        return equilibrium(drawn, self.model, fermi_threshold=self.threshold, efficiency=self.efficiency)

    def interval(self, name: str) -> tuple[float | Array, float | Array] | None:
        """16 and 84 percent of a quantity over the stated uncertainties, or None where nothing is uncertain."""
        if self._sampled is None:
            return None
        row = QUANTITIES[name]
        samples = np.asarray(getattr(self._sampled, name), dtype=float)
        shape = (SAMPLES, 3) if row.axes else (SAMPLES,)
        samples = np.broadcast_to(samples, shape)
        if not np.all(np.isfinite(samples)):
            return None
        low, high = np.quantile(samples, (0.16, 0.84), axis=0)
        return (low, high) if row.axes else (float(low), float(high))

    @cached_property
    def probability_beyond_threshold(self) -> float | None:
        """Share of the draws that are condensed, or below the chosen T/TF; None where nothing is uncertain."""
        if self._sampled is None:
            return None
        limit = 1.0 if self.bosons else self.threshold
        return float(np.mean(np.asarray(self._sampled.reduced_temperature) < limit))


@part("species", "trap", "cloud", "target")
def cloud_answer(plan: Plan) -> CloudAnswer:
    """The cloud of the plan."""
    state = load_species(plan.species.key).state(plan.species.state)
    scattering = _scattering(plan, state)
    cloud = _cloud(plan, state, scattering.value, {name: item.value for name, item in _inputs(plan).items()})
    efficiency = _number(plan.target.efficiency)
    threshold = _number(plan.target.reduced_temperature) or FERMI_THRESHOLD
    solved = equilibrium(cloud, plan.cloud.model, fermi_threshold=threshold, efficiency=efficiency)
    return CloudAnswer(
        plan=plan,
        state=state,
        cloud=cloud,
        equilibrium=solved,
        scattering=scattering,
        caveats=caveats_of(solved, certainty=scattering.certainty),
        efficiency=efficiency,
        threshold=threshold,
    )


FERMI_THRESHOLD = 0.5
"""T/TF that counts as degenerate where the plan's target names none."""


@dataclass(frozen=True, kw_only=True)
class MapLimits:
    """Range of a map: atoms per spin state, temperature [K]."""

    atoms_low: float
    atoms_high: float
    temperature_low: float
    temperature_high: float

    def __post_init__(self) -> None:
        for name, low, high in (
            ("atoms", self.atoms_low, self.atoms_high),
            ("temperature", self.temperature_low, self.temperature_high),
        ):
            if not (0.0 < low < high < math.inf):
                raise ValueError(f"{name} of the map must run from a low to a high positive limit, got {low:g} to {high:g}")

    def holds(self, atoms: float, temperature: float) -> bool:
        return (
            self.atoms_low <= atoms <= self.atoms_high
            and self.temperature_low <= temperature <= self.temperature_high
        )


def usual_limits(plan: Plan) -> MapLimits:
    """The range that a map shows when nothing else is asked: whole decades, at least one of them on every side of the
    cloud and of its threshold."""
    answer = cloud_answer(plan)
    atoms, temperature = float(answer.cloud.atoms), float(answer.cloud.temperature)
    threshold = temperature * float(answer.equilibrium.temperature_to_threshold)
    low_t, high_t = min(temperature, threshold), max(temperature, threshold)
    return MapLimits(
        atoms_low=min(1e3, 10.0 ** math.floor(math.log10(atoms) - 0.8)),
        atoms_high=max(1e7, 10.0 ** math.ceil(math.log10(atoms) + 0.8)),
        temperature_low=10.0 ** math.floor(math.log10(low_t) - 0.8),
        temperature_high=10.0 ** math.ceil(math.log10(high_t) + 0.8),
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class MapAnswer:
    """The plane of atom number and temperature: grids in steps of equal ratio, answers with rows along T.

    `threshold` and `threshold_shifted` are temperatures along `atoms` [K]; the shifted one is NaN for fermions.
    """

    limits: MapLimits
    bosons: bool
    model: Model
    fermi_threshold: float
    atoms: Array
    temperature: Array
    peak_phase_space_density: Array
    reduced_temperature: Array
    condensate_fraction: Array
    threshold: Array
    threshold_shifted: Array


@part("species", "trap", "cloud.model", "target")
def map_answer(plan: Plan, limits: MapLimits, points: int = MAP_POINTS) -> MapAnswer:
    """The map of the plan's trap and species. The plan's own atom number and temperature do not enter.

    Exact levels are summed level by level and would take minutes here: the map then shows the ideal gas, and says so
    by its `model`.
    """
    atoms = np.geomspace(limits.atoms_low, limits.atoms_high, points)
    temperature = np.geomspace(limits.temperature_low, limits.temperature_high, points)
    central = cloud_answer(plan)
    model = Model.IDEAL if central.model is Model.EXACT_LEVELS else central.model
    grid = Cloud(
        statistics=central.cloud.statistics,
        mass=central.cloud.mass,
        trap=central.cloud.trap,
        atoms=atoms[np.newaxis, :],
        temperature=temperature[:, np.newaxis],
        spin_components=central.cloud.spin_components,
        scattering_length=central.cloud.scattering_length,
    )
    solved = equilibrium(grid, model, fermi_threshold=central.threshold)
    bosons = central.bosons
    line = solved.critical_temperature if bosons else central.threshold * np.asarray(solved.fermi_temperature)
    shape = (points, points)
    return MapAnswer(
        limits=limits,
        bosons=bosons,
        model=model,
        fermi_threshold=central.threshold,
        atoms=atoms,
        temperature=temperature,
        peak_phase_space_density=np.broadcast_to(solved.peak_phase_space_density, shape),
        reduced_temperature=np.broadcast_to(solved.reduced_temperature, shape),
        condensate_fraction=np.broadcast_to(solved.condensate_fraction, shape),
        threshold=np.ravel(line),
        threshold_shifted=np.ravel(np.broadcast_to(solved.critical_temperature_shifted, (1, points))),
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class SlicesAnswer:
    """Quantities along temperature at the plan's atom number, and along atom number at its temperature.

    `values_temperature` and `values_atoms` hold the quantities asked for, by NAME, on the two grids.
    """

    atoms: float
    temperature: float
    temperature_grid: Array
    atoms_grid: Array
    names: tuple[str, ...]
    values_temperature: tuple[Array, ...]
    values_atoms: tuple[Array, ...]
    now: tuple[float, ...]
    threshold_temperature: float
    threshold_atoms: float


@part("species", "trap", "cloud", "target")
def slices_answer(plan: Plan, names: tuple[str, ...]) -> SlicesAnswer:
    """Slices through the map at the cloud. A quantity with axes gives its mean over them."""
    central = cloud_answer(plan)
    atoms, temperature = float(central.cloud.atoms), float(central.cloud.temperature)
    # A level sum costs milliseconds, and a hundred points draw a smooth line.
    points = 61 if central.model is Model.EXACT_LEVELS else SLICE_POINTS
    temperatures = np.geomspace(*_decade_around(temperature), points)
    numbers = np.geomspace(*_decade_around(atoms), points)

    def along(atoms: float | Array, temperature: float | Array) -> tuple[Array, ...]:
        cloud = _with(central.cloud, atoms, temperature)
        solved = equilibrium(
            cloud, central.model, fermi_threshold=central.threshold, efficiency=central.efficiency
        )
        return tuple(_plain(solved, name, points) for name in names)

    return SlicesAnswer(
        atoms=atoms,
        temperature=temperature,
        temperature_grid=temperatures,
        atoms_grid=numbers,
        names=names,
        values_temperature=along(atoms, temperatures),
        values_atoms=along(numbers, temperature),
        now=tuple(float(_plain(central.equilibrium, name, 1)[0]) for name in names),
        threshold_temperature=temperature * float(central.equilibrium.temperature_to_threshold),
        threshold_atoms=atoms * float(central.equilibrium.atoms_to_threshold),
    )


def _decade_around(value: float) -> tuple[float, float]:
    """A range that reaches at least a decade to both sides and moves only in half decades, so that a drag seldom
    changes an axis."""
    place = round(2.0 * math.log10(value)) / 2.0
    return 10.0 ** (place - 1.5), 10.0 ** (place + 1.5)


def _with(cloud: Cloud, atoms: float | Array, temperature: float | Array) -> Cloud:
    return Cloud(
        statistics=cloud.statistics,
        mass=cloud.mass,
        trap=cloud.trap,
        atoms=atoms,
        temperature=temperature,
        spin_components=cloud.spin_components,
        scattering_length=cloud.scattering_length,
    )


def _plain(solved: Equilibrium, name: str, points: int) -> Array:
    values = np.asarray(getattr(solved, name), dtype=float)
    if QUANTITIES[name].axes:
        values = np.mean(values, axis=-1)
    return np.broadcast_to(values, (points,))


@dataclass(frozen=True, kw_only=True, eq=False)
class ProfileAnswer:
    """Density along one trap axis through the centre [1/m^3], and the column density along it [1/m^2], which is
    summed along another axis. Positions in m."""

    axis: int
    line_of_sight: int
    bosons: bool
    positions: Array
    density: Profile
    column: Profile


@part("species", "trap", "cloud")
def profile_answer(plan: Plan, axis: int = 0) -> ProfileAnswer:
    """Profiles of the plan's cloud along trap axis 0, 1 or 2."""
    central = cloud_answer(plan)
    reach = 4.0 * float(np.max(_classical_radii(central.cloud)[axis]))
    if central.missing(QUANTITIES["condensate_radii"]) is None:
        reach = max(reach, 1.3 * float(np.asarray(central.equilibrium.condensate_radii)[axis]))
    if not central.bosons:
        energy = float(central.equilibrium.fermi_energy)
        edge = math.sqrt(2.0 * energy / central.cloud.mass) / (2.0 * math.pi * float(central.cloud.trap.frequencies[axis]))
        reach = max(reach, 1.3 * edge)
    reach = round_up(reach)
    positions = np.linspace(-reach, reach, PROFILE_POINTS)
    line_of_sight = 2 if axis != 2 else 1
    return ProfileAnswer(
        axis=axis,
        line_of_sight=line_of_sight,
        bosons=central.bosons,
        positions=positions,
        density=density_profile(central.equilibrium, axis, positions),
        column=column_density_profile(central.equilibrium, axis, positions, line_of_sight),
    )


def round_up(value: float) -> float:
    """The next number 1, 1.5, 2, 3, 4, 5, 6 or 8 times a power of ten: axes that seldom change while a value moves."""
    power = 10.0 ** math.floor(math.log10(value))
    return next((step * power for step in (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0) if value <= step * power), 10.0 * power)


def _classical_radii(cloud: Cloud) -> Array:
    omega = 2.0 * np.pi * np.asarray(cloud.trap.frequencies, dtype=float)
    return np.asarray(np.sqrt(boltzmann * np.asarray(cloud.temperature) / cloud.mass) / omega)


def _inputs(plan: Plan) -> dict[str, Quantity]:
    """The plan's numbers that enter an answer and may be uncertain, by the name of what they are."""
    optional = {"depth": plan.trap.depth, "scattering_length": plan.species.scattering_length}
    return {
        "atoms": plan.cloud.atoms,
        "temperature": plan.cloud.temperature,
        **{f"frequency {axis}": quantity for axis, quantity in enumerate(plan.trap.frequencies)},
        **{name: quantity for name, quantity in optional.items() if quantity is not None},
    }


def _draws(plan: Plan) -> dict[str, float | Array]:
    """Every input of `_inputs`: its samples where it has an uncertainty, else its value. One column of the lattice
    each, so that equal texts are still independent measurements."""
    inputs = _inputs(plan)
    uncertain = [name for name, quantity in inputs.items() if quantity.sigma]
    normal = lattice(SAMPLES, len(uncertain), seed=SEED)
    columns = dict(zip(uncertain, normal.T, strict=True))
    return {
        name: sample(quantity.value, quantity.sigma or 0.0, columns[name]) if name in columns else quantity.value
        for name, quantity in inputs.items()
    }


def _cloud(plan: Plan, state: State, scattering_length: float | None, draws: dict[str, float | Array]) -> Cloud:
    frequencies = np.stack(np.broadcast_arrays(*(draws[f"frequency {axis}"] for axis in range(3))), axis=-1)
    return Cloud(
        statistics=state.statistics,
        mass=state.mass,
        trap=HarmonicTrap(frequencies=frequencies, depth=draws.get("depth")),
        atoms=draws["atoms"],
        temperature=draws["temperature"],
        spin_components=plan.species.spin_components or state.spin_components,
        scattering_length=draws.get("scattering_length", scattering_length),
    )


def _scattering(plan: Plan, state: State) -> LengthInUse:
    """The scattering length: typed, or tuned by the typed field, or from the data."""
    typed = plan.species.scattering_length
    if typed is not None:
        return LengthInUse(value=typed.value, source="given in the plan")
    return length_at_field(state, _number(plan.species.field))


def _number(quantity: Quantity | None) -> float | None:
    return None if quantity is None else quantity.value
