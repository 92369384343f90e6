"""A cloud handed from one trap to another: slowly, so that its entropy stays, or at once.

Slowly: N stays, and with it the entropy of the cut classical gas, S/Nk = ln(V_e/(N lambda^3)) + E/NkT + 1. At once:
every atom keeps its place and momentum and has a new potential energy; those above the new depth are lost, the others
share what they have.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from physics.checks import Floats
from physics.constants import boltzmann
from physics.traps.wells import PowerWell
from physics.truncated_averages import truncated_averages
from physics.truncated_boltzmann import incomplete_gamma

if TYPE_CHECKING:
    from physics.trap_path import TrapPath, TrapPoint
    from physics.traps.wells import Places, Well


@dataclass(frozen=True, kw_only=True, eq=False)
class Transfer:
    """Into another trap, at the beginning of a stage.

    Attributes
    ----------
    path : TrapPath. The trap that follows, its controls as they stand.
    sudden : bool. At once; otherwise slowly.
    displacement : (3,) [m] Of the new minimum, beside what is known of where the minima are; for sudden transfers
        between traps whose potential is known.
    """

    path: TrapPath
    sudden: bool = True
    displacement: tuple[float, float, float] = (0.0, 0.0, 0.0)


@dataclass(frozen=True, kw_only=True)
class Transferred:
    """What is left: share of the atoms, and their mean energy from the bottom of the new trap. [1] [J]

    The share is 0, and the energy NaN, where the new trap cannot hold the cloud.
    """

    share: float
    energy: float


_NOTHING = Transferred(share=0.0, energy=math.nan)


def slow_transfer(temperature: float, old: TrapPoint, new: TrapPoint) -> Transferred:
    """All atoms, with the entropy they had, unless the new trap has no room for it."""
    if old.depth is None or new.depth is None:
        return _NOTHING
    before = truncated_averages(old.curve, old.depth / (boltzmann * temperature))
    entropy = math.log(float(before.number) * old.volume * temperature**1.5) + float(before.energy)
    eta = np.geomspace(0.1, 1e6, 800)
    found = truncated_averages(new.curve, eta)
    # It falls with eta, all the way.
    temperatures = new.depth / (boltzmann * eta)
    entropies = np.log(found.number * new.volume * temperatures**1.5) + found.energy
    if not entropies[-1] <= entropy <= entropies[0]:
        return _NOTHING
    from physics.spline import Spline

    log_eta = Spline(entropies[::-1], np.log(eta[::-1])[:, np.newaxis]).at(entropy)[0]
    after = truncated_averages(new.curve, math.exp(log_eta))
    return Transferred(share=1.0, energy=float(after.energy) * new.depth * math.exp(-log_eta))


def sudden_transfer(
    temperature: float, old: TrapPoint, new: TrapPoint, displacement: tuple[float, float, float] = (0.0, 0.0, 0.0)
) -> Transferred:
    """What the new trap catches, place by place where both potentials are known.

    Where the minima of both are known in the laboratory, the way between them counts; a trap that is given by its
    frequencies is taken to have its minimum where that of the other one is. `displacement`: of the new minimum, beside
    that. Relative error about 1e-4 of what is lost.

    Where a potential is not known, surfaces of equal energy are taken to keep their shape. That is exact for a harmonic
    trap or a quadrupole that is scaled, or whose depth alone is changed.

    Raises
    ------
    ValueError : for a displacement between traps of which only volumes are known.
    """
    if old.depth is None or new.depth is None:
        return _NOTHING
    if old.well is not None and new.well is not None:
        way = np.asarray(displacement, dtype=np.float64)
        if old.well.minimum is not None and new.well.minimum is not None:
            way = way + new.well.minimum - old.well.minimum
        if np.any(way != 0.0) or not _alike(old.well, new.well):
            return _by_place(temperature, old, old.well, new, new.well, way)
    elif any(displacement):
        raise ValueError("a displaced transfer needs traps whose potential is known")
    return _nested(temperature, old, new)


def distance_in_radii(mass: float, temperature: float, old: TrapPoint, new: TrapPoint) -> float:
    """Distance of the minima over the mean rms radius of an uncut classical cloud in the old trap. [1] NaN where the
    minima are not known, or the old trap has neither frequencies nor a field that vanishes."""
    if old.minimum is None or new.minimum is None:
        return math.nan
    kT = boltzmann * temperature
    if old.frequencies is not None:
        radius = math.sqrt(kT / mass) / (2.0 * math.pi * math.prod(old.frequencies) ** (1.0 / 3.0))
    elif old.zero_force > 0.0:
        # Of exp(-F r/kT) in stretched coordinates <x^2> = 4 (kT/F)^2, on the strong axis; twice that on the others.
        radius = 2.0 ** (5.0 / 3.0) * kT / old.zero_force
    else:
        return math.nan
    return math.dist(old.minimum, new.minimum) / radius


def _alike(here: Well, there: Well) -> bool:
    """Whether two potentials that are given by numbers differ by a factor alone."""
    if not (isinstance(here, PowerWell) and isinstance(there, PowerWell) and here.power == there.power):
        return False
    ratio = there.matrix.trace() / here.matrix.trace()
    return bool(np.allclose(there.matrix, ratio * here.matrix, rtol=1e-9, atol=1e-9 * np.max(abs(there.matrix))))


def _nested(temperature: float, old: TrapPoint, new: TrapPoint) -> Transferred:
    """By volume: where W has a value the old potential is U, and the new one U'."""
    assert old.depth is not None
    assert new.depth is not None
    kT = boltzmann * temperature
    # The part of the old cloud that lies within the new trap.
    within = 1.0
    if new.volume < old.volume:
        within = float(old.curve.energy(np.asarray(new.volume / old.volume)))
    u, dw = old.curve.measure_below(within)
    potential = new.depth * new.curve.energy(np.minimum(old.curve.volume(u) * old.volume / new.volume, 1.0))
    filled, room = old.depth * (1.0 - u) / kT, np.maximum(new.depth - potential, 0.0) / kT
    x, x_new, cut = u * old.depth / kT, potential / kT, np.minimum(filled, room)
    places, everywhere = old.curve.measure
    eta = old.depth / kT
    number = float(np.sum(everywhere * np.exp(-eta * places) * incomplete_gamma(1.5, eta * (1.0 - places))))
    weights = dw * np.exp(-x)
    kept = incomplete_gamma(1.5, cut)
    share = float(np.sum(weights * kept)) / number
    if share <= 0.0:
        return _NOTHING
    energy = float(np.sum(weights * (x_new * kept + 1.5 * incomplete_gamma(2.5, cut)))) / number
    return Transferred(share=min(share, 1.0), energy=energy / share * kT)


def _by_place(temperature: float, old: TrapPoint, here: Well, new: TrapPoint, there: Well, way: Floats) -> Transferred:
    """Over places of the old cloud, whose minimum is the way from the new one."""
    assert old.depth is not None
    assert new.depth is not None
    kT = boltzmann * temperature
    places = here.places(old.depth, kT)
    weights = _counted_right(places, old) * np.exp(-places.energies / kT)
    # What is too hot and too rare to count costs the time of the rest.
    counts = weights > _RARE * np.max(weights)
    weights, x = weights[counts], places.energies[counts] / kT
    x_new = (there.energy(places.displacements[counts] - way) + places.lifts[counts]) / kT
    filled = np.maximum(old.depth / kT - x, 0.0)
    kept = np.minimum(filled, np.maximum(new.depth / kT - x_new, 0.0))
    before, after = _momenta(filled), _momenta(kept)
    number, caught = float(weights @ before[0]), float(weights @ after[0])
    if caught <= 0.0:
        return _NOTHING
    energy = float(weights @ (x * before[0] + before[1]))
    inside = kept > 0.0
    energy_after = float(weights[inside] @ (x_new[inside] * after[0][inside] + after[1][inside])) / caught
    # What the sum misses of the energy before, it misses after.
    exact = float(truncated_averages(old.curve, old.depth / kT).energy) * number / energy
    return Transferred(share=min(caught / number, 1.0), energy=energy_after * exact * kT)


def _momenta(cut: Floats) -> tuple[Floats, Floats]:
    """Share of a Maxwell distribution below a kinetic energy over kT, P(3/2, y), and its energy, (3/2) P(5/2, y)."""
    from scipy.special import erf  # loads late

    root = np.sqrt(cut)
    tail = root * np.exp(-cut) / math.sqrt(math.pi)
    share: Floats = erf(root) - 2.0 * tail
    return share, 1.5 * share - 2.0 * cut * tail


_RARE = 1e-9
_SHELLS = 24


def _counted_right(places: Places, old: TrapPoint) -> Floats:
    """Volumes of places, those that were counted so that shells of energy have the volume of the trap's own curve."""
    assert old.depth is not None
    low = places.exact_to / old.depth
    if low >= 1.0:
        return places.volumes
    shells = np.linspace(low, 1.0, _SHELLS + 1)
    shell = np.searchsorted(shells, places.energies / old.depth, side="right") - 1
    counted = shell >= 0
    shell = np.minimum(shell, _SHELLS - 1)
    room = old.volume * np.diff(old.curve.volume(shells))
    found = np.bincount(shell[counted], places.volumes[counted], _SHELLS)
    with np.errstate(divide="ignore", invalid="ignore"):
        factors = np.where(found > 0.0, room / found, 0.0)
    return np.where(counted, places.volumes * factors[shell], places.volumes)
