"""What an answer does not cover: which caveat, how grave, and the number that raised it.

Ids and SI numbers only; the sentences are written where they are shown. Of an array of clouds the worst one counts.
Limits of local density come from comparing it with exact sums over oscillator levels, for ideal atoms in many traps;
the others are where a first-order correction reaches a few percent.

References
----------
[1] P. A. Ruprecht, M. J. Holland, K. Burnett, M. Edwards, Phys. Rev. A 51, 4704 (1995): collapse of an attractive
    condensate. Recalled.
[2] T. D. Lee, K. Huang, C. N. Yang, Phys. Rev. 106, 1135 (1957): energy of a dilute Bose gas beyond mean field.
[3] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996): truncated clouds.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from enum import Enum
from types import MappingProxyType
from typing import TYPE_CHECKING, Protocol, TypeVar

import numpy as np

from physics.checks import Floats
from physics.condensate import COLLAPSE, Condensate
from physics.constants import reduced_planck
from physics.models import Model
from physics.particles import Certainty, Statistics
from physics.statistics import zeta
from physics.traps.harmonic import HarmonicTrap

if TYPE_CHECKING:
    from collections.abc import Mapping

    from physics.equilibria import Equilibrium


_REPULSIVE = (Model.SEMI_IDEAL, Model.HARTREE_FOCK)
"""Models whose condensate is that of Thomas and Fermi."""

NARROW = 0.25
"""Share of all directions below which the way out of a trap is narrow, for clouds at rest and along ramps."""


class Severity(Enum):
    """How much a caveat weighs.

    NOTE: worth knowing. WARNING: numbers are off by more than they look. REFUSAL: the answer does not describe this
    cloud.
    """

    NOTE = "note"
    WARNING = "warning"
    REFUSAL = "refusal"


@dataclass(frozen=True, kw_only=True)
class Caveat:
    """One caveat.

    Attributes
    ----------
    id : str. One of `CAVEAT_IDS`.
    severity : Severity
    value : float or None. The number that raised it, in SI units or a ratio; the table of ids says which.
    numbers : mapping of further numbers by name, SI.
    subject : name of what it is about, such as one of several beams; empty where that is plain.
    """

    id: str
    severity: Severity
    value: float | None = None
    numbers: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    subject: str = ""

    def __post_init__(self) -> None:
        if self.id not in CAVEAT_IDS:
            raise ValueError(f"caveat id must be one of {', '.join(CAVEAT_IDS)}, got {self.id}")


CAVEAT_IDS = MappingProxyType(
    {
        "model_length_unknown": "no value: ideal used, the scattering length is not known",
        "model_not_repulsive": "scattering length [m]: ideal used, the model needs a repulsive gas",
        "model_bosons_only": "no value: ideal used, the model describes bosons",
        "model_harmonic_only": "no value: ideal used, levels are known of a harmonic trap only",
        "length_unknown": "no value: scattering length not known, so neither collisions nor shifts by interaction",
        "length_recalled": "scattering length [m]: recalled from its source, not read there",
        "length_computed": "scattering length [m]: worked out from other data",
        "finite_size": "first-order shift -dTc/Tc0 by the finite size of the trap's levels",
        "local_density": "hbar w_max/kTc0 of bosons, relative error of N of fermions: local density is off",
        "exact_levels_advised": "hbar w_max/kT: only exact levels describe this cloud; shift, if that is the reason",
        "shell_structure": "kT/(hbar w_max): shells of the oscillator show",
        "low_dimension": "hbar w_max/kT of bosons, EF/(hbar w_max) of fermions; frozen_axes",
        "frozen_thermal": "hbar w_max/kT: thermal atoms hardly reach the first level of the tightest axis",
        "few_atoms": "N: grand-canonical means differ from those of a fixed number",
        "thomas_fermi": "N0 a/aho: too small for a Thomas-Fermi condensate",
        "near_threshold": "T/Tc0: repulsion among thermal atoms, left out, counts here",
        "attractive": "scattering length [m]; collapse_atoms",
        "collapse": "N0 over the largest stable number; collapse_atoms",
        "dipolar": "a_dd/a: the interaction of magnetic dipoles, left out, counts; dipolar_length",
        "dipolar_unstable": "a_dd/a above 1: their attraction makes a large condensate unstable; dipolar_length",
        "density_jump": "share by which the density of the mean field jumps at the edge of the condensate, an artefact",
        "dense": "n |a|^3 at the peak",
        "long_range_length": "|a|/lambda, near the threshold or below it",
        "fermi_interaction": "kF |a|; inverse = 1/(kF a)",
        "polarised_fermions": "no value: one spin state does not collide by s-waves",
        "pauli_blocking": "T/TF: collisions slowed by filled levels, left out of the rate",
        "hydrodynamic": "mean collision rate over the highest angular trap frequency",
        "truncated": "depth over kT: the trap cuts the cloud, which is answered as if it did not",
        "shallow": "depth over kT: atoms leave so shallow a trap fast, so that it is in equilibrium for a short time",
        "overfull": "N over the most atoms that the trap holds below its depth",
        "no_frequencies": "no value: a trap without frequencies; what needs them is unknown, local density is assumed",
        "open_trap": "share of the depth, above which a volume has no end, that is the highest energy held",
        "harmonic_trap": "volume of a classical cloud over that in the harmonic trap of the same frequencies;"
        " truncation, arms, in_arms, T over the threshold or TF in both: real, harmonic, and the peak phase-space"
        " density of a cloud without a condensate: real_density, harmonic_density",
        "trap_uncertainty": "largest change of ln f, ln depth or ln volume by one standard deviation of a number of"
        " beams and coils: too large to be followed to first order",
        "blue_light": "relative detuning from the nearest line: the light of a beam (subject) repels the atoms",
        "near_resonance": "relative detuning: the light of a beam (subject) is close to a line",
        "tight_focus": "waist over wavelength: a beam (subject) is focused too tightly for a Gaussian beam",
        "published_polarizability": "relative distance of the wavelength of a beam (subject) from the published one",
        "wall": "distance [m] of the wall, which alone limits the trap",
        "arm_end": "energy [J] of the way out, the end of a beam's arm as far as it is followed",
        "linear_zeeman": "muB B/h or radio frequency [Hz]: the Zeeman effect is taken as linear",
        "knife_idle": "radio frequency [Hz] of a knife that does nothing to this state",
        "one_way_out": "share of the directions that are open to atoms of the depth + kT: a narrow way out",
        "spin_flips": "loss rate [1/s] at the zero of the field, an order of magnitude; least, largest",
        "light_heating": "heating [K/s] by scattered light; share of T that it adds in the time [s] that a cloud lasts",
        "no_background": "no value: no background lifetime, so that lifetimes are upper bounds",
        "three_body_unknown": "no value: K3 not known, three-body loss left out",
        "two_body_recalled": "K2 [m^3/s]: recalled from its source, not read there",
        "three_body_recalled": "K3 [m^6/s]: recalled from its source, not read there",
        "three_body_scaling": "K3 over 201 hbar a^4/m",
        "three_body_unitarity": "K3 over its largest value at this temperature",
        "three_body_elsewhere": "(a/a of the measurement)^4: K3 was measured at another scattering length",
        "loss_fast": "share of the atoms lost in one rethermalisation time",
        "heating_fast": "share of T gained in one rethermalisation time",
        "loss_ideal_condensate": "peak density [1/m^3]: of a condensate without repulsion, which losses reckon with",
        "dipolar_fast": "k a_d: cross-section of dipoles taken as for slow atoms",
    }
)
"""Every caveat, and what its value means."""

# First-order finite-size shift: shown, warned about, too large for local density.
_SHIFT_SHOWN, _SHIFT_WARNED, _SHIFT_TOO_LARGE = 0.02, 0.05, 0.12
_LEVEL_OVER_TC_WARNED, _LEVEL_OVER_T_TOO_LARGE = 0.1, 0.25
_FERMI_NUMBER_ERROR, _FERMI_LEVELS = 0.01, 2.0
_SHELLS = 0.2
_FEW_ATOMS = 100.0
_THOMAS_FERMI = 10.0
_NEAR_THRESHOLD = (0.9, 1.0)
_DIPOLAR, _DIPOLAR_UNSTABLE = 0.1, 1.0
_JUMP = 0.05
# (128/15) sqrt(n a^3/pi), the first correction to the energy of a condensate [2], is 5 % at the first; Tc moves by
# 3.4 a/lambda, 10 % at the second.
_DENSE, _LONG = 1e-4, 0.03
_NEAR = 2.0  # T/Tc from which the mean field 4 D a/lambda of kT is small whatever a is
_FERMI_INTERACTION = 0.3
_PAULI = 0.5
_TRUNCATION = 5.0


def caveats_of(
    equilibrium: Equilibrium, *, certainty: Certainty | None = None, dipolar: bool = False
) -> tuple[Caveat, ...]:
    """The caveats of an equilibrium, gravest first.

    Parameters
    ----------
    equilibrium : Equilibrium. The worst of its clouds counts.
    certainty : Certainty or None. How the scattering length came to be known; None for one given by the user.
    dipolar : bool. Whether the atoms collide by their magnetic moments also.
    """
    bosons = equilibrium.cloud.statistics is Statistics.BOSE
    found = [*_model(equilibrium), *_data(equilibrium, certainty)]
    found += [*_boson_levels(equilibrium), *_bosons(equilibrium)] if bosons else [*_fermions(equilibrium, dipolar)]
    found += _any(equilibrium)
    return gravest_first(found)


class Weighed(Protocol):
    """A caveat of any kind."""

    @property
    def severity(self) -> Severity: ...


_AnyCaveat = TypeVar("_AnyCaveat", bound=Weighed)


def gravest_first(caveats: Iterable[_AnyCaveat]) -> tuple[_AnyCaveat, ...]:
    """Caveats in the order in which they are to be read."""
    gravest = list(Severity)[::-1]
    return tuple(sorted(caveats, key=lambda caveat: gravest.index(caveat.severity)))


def _model(solved: Equilibrium) -> Iterator[Caveat]:
    if solved.replaced is None:
        return
    length = _lowest(solved.cloud.length) if solved.replaced.name == "NOT_REPULSIVE" else None
    yield Caveat(id=f"model_{solved.replaced.name.lower()}", severity=Severity.NOTE, value=length)


def _data(solved: Equilibrium, certainty: Certainty | None) -> Iterator[Caveat]:
    length = solved.cloud.length
    collide = solved.bosons or solved.cloud.spin_components > 1
    if np.any(np.isnan(length)):
        if collide and solved.replaced is None:
            yield Caveat(id="length_unknown", severity=Severity.NOTE)
    elif collide and certainty in (Certainty.MEMORY, Certainty.COMPUTED):
        word = "recalled" if certainty is Certainty.MEMORY else "computed"
        yield Caveat(id=f"length_{word}", severity=Severity.NOTE, value=float(np.mean(length)))


def _highest_level(solved: Equilibrium) -> Floats:
    """hbar times the highest angular frequency. [J]"""
    energy: Floats = reduced_planck * np.max(solved.cloud.trap.angular_frequencies, axis=-1)
    return energy


def _frozen_axes(solved: Equilibrium, energy: Floats) -> Mapping[str, float]:
    """How many axes have their first excited level above an energy."""
    levels = reduced_planck * solved.cloud.trap.angular_frequencies
    return MappingProxyType({"frozen_axes": _highest((levels > np.asarray(energy)[..., np.newaxis]).sum(axis=-1))})


def _boson_levels(solved: Equilibrium) -> Iterator[Caveat]:
    level = _highest_level(solved)
    over_t = _highest(level / solved.thermal_energy)
    over_tc = _highest(level / solved.thermal_energy * solved.reduced_temperature)
    shift = _highest(solved.finite_size_shift)
    if solved.model is Model.EXACT_LEVELS:
        if _lowest(solved.cloud.atoms) < _FEW_ATOMS:
            yield Caveat(id="few_atoms", severity=Severity.NOTE, value=_lowest(solved.cloud.atoms))
        return
    if over_t > 1.0:
        # A Thomas-Fermi condensate spans many levels however cold it is; then only its few thermal atoms are concerned.
        if solved.model in _REPULSIVE and _lowest(solved.chemical_potential / level) > 1.0:
            yield Caveat(id="frozen_thermal", severity=Severity.WARNING, value=over_t)
        else:
            frozen = _frozen_axes(solved, solved.thermal_energy)
            yield Caveat(id="low_dimension", severity=Severity.REFUSAL, value=over_t, numbers=frozen)
    elif over_t > _LEVEL_OVER_T_TOO_LARGE or shift > _SHIFT_TOO_LARGE:
        few = MappingProxyType({"shift": shift}) if over_t <= _LEVEL_OVER_T_TOO_LARGE else MappingProxyType({})
        yield Caveat(id="exact_levels_advised", severity=Severity.WARNING, value=over_t, numbers=few)
    elif over_tc > _LEVEL_OVER_TC_WARNED or shift > _SHIFT_WARNED:
        yield Caveat(id="local_density", severity=Severity.WARNING, value=over_tc)
    if shift > _SHIFT_SHOWN:
        yield Caveat(id="finite_size", severity=Severity.NOTE, value=shift)


def _bosons(solved: Equilibrium) -> Iterator[Caveat]:
    length = solved.cloud.length
    if np.all(np.isnan(length)):
        return
    condensed = np.asarray(solved.condensate_atoms)
    reduced = condensed * np.abs(length) / solved.oscillator_length  # N0 |a|/aho
    if _lowest(length) < 0.0:
        limit = float(np.min(COLLAPSE * solved.oscillator_length / np.abs(length)))
        numbers = MappingProxyType({"collapse_atoms": limit})
        excess = _highest(np.where(length < 0.0, reduced, 0.0)) / COLLAPSE
        if excess > 1.0:
            yield Caveat(id="collapse", severity=Severity.REFUSAL, value=excess, numbers=numbers)
        else:
            yield Caveat(id="attractive", severity=Severity.NOTE, value=_lowest(length), numbers=numbers)
    if solved.model in _REPULSIVE:
        weakest = _lowest(np.where(condensed > 0.0, reduced, np.inf))
        if weakest < _THOMAS_FERMI:
            yield Caveat(id="thomas_fermi", severity=Severity.WARNING, value=weakest)
    if solved.model is Model.SEMI_IDEAL:
        ratio = np.asarray(solved.reduced_temperature)
        near = (ratio > _NEAR_THRESHOLD[0]) & (ratio < _NEAR_THRESHOLD[1])
        if np.any(near):
            yield Caveat(id="near_threshold", severity=Severity.NOTE, value=float(np.max(ratio[near])))
    if solved.model is Model.HARTREE_FOCK:
        jump = _highest(np.where(condensed > 0.0, _edge_density_jump(solved), 0.0))
        if jump > _JUMP:
            yield Caveat(id="density_jump", severity=Severity.NOTE, value=jump)
    dipolar = _highest(Condensate(equilibrium=solved).dipolar_ratio)
    if dipolar > _DIPOLAR:
        unstable = dipolar > _DIPOLAR_UNSTABLE
        yield Caveat(
            id="dipolar_unstable" if unstable else "dipolar",
            severity=Severity.WARNING if unstable else Severity.NOTE,
            value=dipolar,
            numbers=MappingProxyType({"dipolar_length": float(solved.cloud.dipolar_length or 0.0)}),
        )
    # The condensate of a gas without interaction is far denser than a real one, so it is not what is judged.
    density = solved.peak_density if solved.model in _REPULSIVE else _thermal_density(solved)
    dense, long = _highest(density * np.abs(length) ** 3), _highest(np.abs(length) / solved.thermal_wavelength)
    if dense > _DENSE:
        yield Caveat(id="dense", severity=Severity.WARNING, value=dense)
    if long > _LONG and _lowest(solved.reduced_temperature) < _NEAR:
        yield Caveat(id="long_range_length", severity=Severity.WARNING, value=long)


def _edge_density_jump(solved: Equilibrium) -> Floats:
    from physics.hartree_fock import HartreeFock  # not loaded for other models
    from physics.real_hartree_fock import RealHartreeFock

    assert isinstance(solved, (HartreeFock, RealHartreeFock))
    return solved.edge_density_jump


def _thermal_density(solved: Equilibrium) -> Floats:
    density: Floats = np.minimum(solved.peak_phase_space_density, zeta(1.5)) / solved.thermal_wavelength**3
    return density


def _fermions(solved: Equilibrium, dipolar: bool) -> Iterator[Caveat]:
    level = _highest_level(solved)
    exact = solved.model is Model.EXACT_LEVELS
    squares = np.sum((reduced_planck * solved.cloud.trap.angular_frequencies) ** 2, axis=-1)
    # N at a given mu, to second order in hbar w: -sum (hbar w)^2/(24 (kT)^2) f_1/f_3, which is 1/(4 EF^2) at T = 0.
    log_z = np.asarray(solved.log_fugacity)
    hot = (
        np.where(np.isnan(log_z), np.nan, np.logaddexp(0.0, np.nan_to_num(log_z)))
        / solved.classical_phase_space_density
    )
    number_error = _highest(squares / (24.0 * solved.thermal_energy**2) * hot)
    # A gas has three dimensions where kT reaches all axes, however few of its levels are filled.
    cold = np.asarray(solved.thermal_energy / level) < 1.0
    filled = _lowest(np.where(cold, solved.fermi_energy / level, np.inf))
    shells = _lowest(solved.thermal_energy / level)
    if exact:
        if _lowest(solved.cloud.atoms) < _FEW_ATOMS:
            yield Caveat(id="few_atoms", severity=Severity.NOTE, value=_lowest(solved.cloud.atoms))
    elif filled < _FERMI_LEVELS:
        frozen = _frozen_axes(solved, np.maximum(solved.fermi_energy / _FERMI_LEVELS, solved.thermal_energy))
        yield Caveat(id="low_dimension", severity=Severity.REFUSAL, value=filled, numbers=frozen)
    elif number_error > _FERMI_NUMBER_ERROR:
        yield Caveat(id="local_density", severity=Severity.WARNING, value=number_error)
    if shells < _SHELLS and not exact:
        yield Caveat(id="shell_structure", severity=Severity.NOTE, value=shells)
    if solved.cloud.spin_components == 1:
        if not dipolar:
            yield Caveat(id="polarised_fermions", severity=Severity.WARNING)
        return
    coldest = _lowest(solved.reduced_temperature)
    if coldest < _PAULI:
        yield Caveat(id="pauli_blocking", severity=Severity.NOTE, value=coldest)
    kFa = np.asarray(solved.fermi_wavenumber * solved.cloud.length).reshape(-1)
    if not np.all(np.isnan(kFa)):
        strongest = float(kFa[np.nanargmax(np.abs(kFa))])
        if abs(strongest) > _FERMI_INTERACTION:
            yield Caveat(
                id="fermi_interaction",
                severity=Severity.WARNING,
                value=abs(strongest),
                numbers=MappingProxyType({"inverse": 1.0 / strongest}),
            )


def _any(solved: Equilibrium) -> Iterator[Caveat]:
    shallow = _lowest(solved.truncation)
    real = not isinstance(solved.cloud.trap, HarmonicTrap)
    if shallow < _TRUNCATION:
        yield Caveat(id="shallow" if real else "truncated", severity=Severity.WARNING, value=shallow)
    if real:
        yield from _real_trap(solved)
    fastest = np.max(solved.cloud.trap.angular_frequencies, axis=-1)
    crowded = _highest(solved.elastic_collision_rate / fastest)
    if crowded > 1.0:
        yield Caveat(id="hydrodynamic", severity=Severity.NOTE, value=crowded)


def _real_trap(solved: Equilibrium) -> Iterator[Caveat]:
    from physics.real_equilibria import RealEquilibrium  # not loaded for harmonic traps

    assert isinstance(solved, RealEquilibrium)
    share = _lowest(solved.trap.held / solved.trap.depth)
    if share < 1.0 - 1e-9:
        yield Caveat(id="open_trap", severity=Severity.NOTE, value=share)
    if not solved.trap.has_frequencies:
        yield Caveat(id="no_frequencies", severity=Severity.NOTE)
    filling = _highest(solved.atoms_over_most)
    if filling >= 1.0:
        yield Caveat(id="overfull", severity=Severity.REFUSAL, value=filling)


def _highest(value: Floats) -> float:
    """The largest element; NaN, which compares false with every limit, only where there is no number at all."""
    return float(np.fmax.reduce(np.ravel(value)))


def _lowest(value: Floats) -> float:
    return float(np.fmin.reduce(np.ravel(value)))
