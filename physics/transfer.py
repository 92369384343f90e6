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
from physics.harmonic_integrals import legendre
from physics.truncated_averages import truncated_averages
from physics.truncated_boltzmann import incomplete_gamma

if TYPE_CHECKING:
    from physics.trap_path import TrapPath, TrapPoint


@dataclass(frozen=True, kw_only=True, eq=False)
class Transfer:
    """Into another trap, at the beginning of a stage.

    Attributes
    ----------
    path : TrapPath. The trap that follows, its controls as they stand.
    sudden : bool. At once; otherwise slowly.
    displacement : (3,) [m] Of the new minimum from the old one, along the axes of the frequencies; for sudden transfers
        between traps that have frequencies.
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
    """What the new trap catches.

    Between traps with harmonic volume curves and known frequencies the axes are taken as the same and the displacement
    counts. Otherwise surfaces of equal potential are taken to keep their shape, which holds for a trap that is scaled,
    or whose depth alone is changed.
    """
    if old.depth is None or new.depth is None:
        return _NOTHING
    harmonic = all(point.curve.power_law and point.frequencies is not None for point in (old, new))
    if harmonic and (any(displacement) or not _similar(old, new)):
        return _harmonic(temperature, old, new, displacement)
    if any(displacement):
        raise ValueError("a displaced transfer needs harmonic traps with known frequencies")
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


def _similar(old: TrapPoint, new: TrapPoint) -> bool:
    assert old.frequencies is not None
    assert new.frequencies is not None
    ratios = [a / b for a, b in zip(old.frequencies, new.frequencies, strict=True)]
    return max(ratios) - min(ratios) < 1e-9 * max(ratios)


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
    return _caught(u * old.depth / kT, potential / kT, np.minimum(filled, room), dw, filled, old, kT)


def _caught(
    x: Floats, x_new: Floats, cut: Floats, dw: Floats, filled: Floats, old: TrapPoint, kT: float
) -> Transferred:
    """Sum over places: potential energies over kT before and after, and the kinetic energy to which atoms are kept."""
    assert old.depth is not None
    u, whole = old.curve.measure
    eta = old.depth / kT
    number = float(np.sum(whole * np.exp(-eta * u) * incomplete_gamma(1.5, eta * (1.0 - u))))
    weights = dw * np.exp(-x)
    kept = incomplete_gamma(1.5, cut)
    share = float(np.sum(weights * kept)) / number
    energy = float(np.sum(weights * (x_new * kept + 1.5 * incomplete_gamma(2.5, cut)))) / number
    if share <= 0.0:
        return _NOTHING
    return Transferred(share=min(share, 1.0), energy=energy / share * kT)


_CROSS, _REACH = 40, 7.0


def _harmonic(
    temperature: float, old: TrapPoint, new: TrapPoint, displacement: tuple[float, float, float]
) -> Transferred:
    """Over all places of the old cloud, in units of its thermal widths; relative error about 1e-4 of what is lost."""
    assert old.depth is not None
    assert new.depth is not None
    assert old.frequencies is not None
    assert new.frequencies is not None
    kT = boltzmann * temperature
    eta = old.depth / kT
    # The mass follows from the volume at the depth.
    angular = (2.0 * math.pi) ** 3 * math.prod(old.frequencies)
    mass = 2.0 * old.depth / (3.0 * old.volume * angular / (4.0 * math.pi)) ** (2.0 / 3.0)
    reach = min(_REACH, math.sqrt(2.0 * eta))
    t, w = legendre(_CROSS)
    places, weights = reach * (2.0 * t - 1.0), 2.0 * reach * w
    before, after, weight = np.zeros(1), np.zeros(1), np.ones(1)
    for f, f_new, shift in zip(old.frequencies, new.frequencies, displacement, strict=True):
        moved = places - shift * 2.0 * math.pi * f * math.sqrt(mass / kT)
        before = np.add.outer(before, 0.5 * places**2).ravel()
        after = np.add.outer(after, 0.5 * (f_new / f) ** 2 * moved**2).ravel()
        weight = np.multiply.outer(weight, weights).ravel()
    filled, room = np.maximum(eta - before, 0.0), np.maximum(new.depth / kT - after, 0.0)
    cut = np.minimum(filled, room)
    kept, uncut = incomplete_gamma(1.5, cut), incomplete_gamma(1.5, filled)
    weight = weight * np.exp(-before)
    number = float(np.sum(weight * uncut))
    share = float(np.sum(weight * kept)) / number
    if share <= 0.0:
        return _NOTHING
    energy = float(np.sum(weight * (after * kept + 1.5 * incomplete_gamma(2.5, cut)))) / number
    return Transferred(share=min(share, 1.0), energy=energy / share * kT)
