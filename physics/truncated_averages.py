"""A classical gas cut off at the trap depth, in a trap of any volume curve: integrals over the potential energy.

Where the potential is U, a share P(3/2, y) of the momenta is left, y = (e_t - U)/kT: n = n_ref e^(-U/kT) P(3/2, y).
What a uniform gas of that truncation does is summed over the volumes dW [1]. Power laws give the closed forms of
`physics.truncated_boltzmann`.

Reference
---------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996).
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.truncated_boltzmann import BOX, central_density, evaporation_volume, incomplete_gamma
from physics.volume_curve import VolumeCurve


@dataclass(frozen=True, kw_only=True, eq=False)
class TruncatedAverages:
    """Functions of the truncation parameter eta, in the shape of `truncation`. All [1].

    Attributes
    ----------
    truncation : eta.
    number : V_e over the volume at the depth: N = n_ref W(e_t) `number`.
    energy : E/NkT, from the bottom.
    heat_capacity : dE/dT/Nk at fixed N and depth.
    evaporation : V_ev/V_e.
    excess : kappa; an evaporated atom carries (eta + kappa) kT.
    spilling : -dlnN over dlnS, S the number of levels below the depth.
    centre : n(0)/n_ref.
    pair, triple : <n>/n_ref and <n^2>/n_ref^2 that atoms meet in the mean.
    pair_energy, triple_energy : mean energy of an atom that two- and three-body collisions take, in kT.
    """

    truncation: Floats
    number: Floats
    energy: Floats
    heat_capacity: Floats
    evaporation: Floats
    excess: Floats
    spilling: Floats
    centre: Floats
    pair: Floats
    triple: Floats
    pair_energy: Floats
    triple_energy: Floats


def truncated_averages(curve: VolumeCurve, truncation: ArrayLike) -> TruncatedAverages:
    """All averages of a cut cloud. Relative error below 1e-9 for power laws up to eta = 2000."""
    eta = np.asarray(truncation, dtype=np.float64)
    u, dw = curve.measure
    x = eta[..., np.newaxis] * u
    y = eta[..., np.newaxis] * (1.0 - u)
    share, five, seven = (incomplete_gamma(order, y) for order in (1.5, 2.5, 3.5))
    density = np.exp(-x) * share
    number = density @ dw
    weights = np.exp(-x) * dw / number[..., np.newaxis]
    first = np.sum(weights * (x * share + 1.5 * five), axis=-1)
    second = np.sum(weights * (x * x * share + 3.0 * x * five + 3.75 * seven), axis=-1)
    local = evaporation_volume(BOX, y)
    evaporation = np.sum(weights * share * local, axis=-1)
    taken = np.sum(weights * seven, axis=-1)
    met = x + 1.5 * five / share
    pairs, triples = density**2 * dw, density**3 * dw
    pair, triple = np.sum(pairs, axis=-1), np.sum(triples, axis=-1)
    levels = 4.0 / (3.0 * math.sqrt(math.pi)) * eta**1.5 * np.exp(-eta) * curve.rim_levels
    return TruncatedAverages(
        truncation=eta,
        number=number,
        energy=first,
        heat_capacity=second - first**2,
        evaporation=evaporation,
        excess=1.0 - taken / evaporation,
        spilling=levels / number,
        centre=central_density(eta),
        pair=pair / number,
        triple=triple / number,
        pair_energy=np.sum(pairs * met, axis=-1) / pair,
        triple_energy=np.sum(triples * met, axis=-1) / triple,
    )


def relative_number(curve: VolumeCurve, truncation: ArrayLike) -> Floats:
    """V_e over the volume at the depth alone. [1]"""
    eta = np.asarray(truncation, dtype=np.float64)[..., np.newaxis]
    u, dw = curve.measure
    number: Floats = (np.exp(-eta * u) * incomplete_gamma(1.5, eta * (1.0 - u))) @ dw
    return number
