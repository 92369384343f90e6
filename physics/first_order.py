"""The condensed fraction in a harmonic trap to first order in finite size and in the interaction.

    N0/N = 1 - t^3 - 3 d t^2 - (zeta(2)/zeta(3)) h t^2 (1 - t^3)^(2/5),    t = T/Tc0,

d being the finite-size shift of Tc and h = mu(T = 0)/(k Tc0) = 1.5705 (N^(1/6) a/aho)^(2/5). A formula to check the
models by, and for the back of an envelope: for d and h well below 1 and t not close to 1, where it turns negative.

References
----------
[1] S. Giorgini, L. P. Pitaevskii, S. Stringari, J. Low Temp. Phys. 109, 309 (1997); F. Dalfovo, S. Giorgini,
    L. P. Pitaevskii, S. Stringari, Rev. Mod. Phys. 71, 463 (1999), section V: interaction. Recalled.
[2] S. Grossmann and M. Holthaus, Phys. Lett. A 208, 188 (1995); W. Ketterle and N. J. van Druten, Phys. Rev. A 54, 656
    (1996): finite size.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats
from physics.statistics import zeta

SCALE = 0.5 * zeta(3.0) ** (1.0 / 3.0) * 15.0**0.4
"""1.5705: mu(T = 0)/(k Tc0) of a Thomas-Fermi condensate of all atoms is this times (N^(1/6) a/aho)^(2/5). [1] [1]"""


def interaction_scale(atoms: ArrayLike, scattering_length: ArrayLike, oscillator_length: ArrayLike) -> Floats:
    """h = mu(T = 0)/(k Tc0); 0 without repulsion, NaN where the length is unknown. [1]"""
    N, a, aho = (np.asarray(value, dtype=np.float64) for value in (atoms, scattering_length, oscillator_length))
    scale: Floats = SCALE * (N ** (1.0 / 6.0) * np.maximum(a, 0.0) / aho) ** 0.4
    return scale


def condensate_fraction(reduced_temperature: ArrayLike, finite_size_shift: ArrayLike, scale: ArrayLike) -> Floats:
    """N0/N; NaN from where the formula first turns negative on.

    Parameters
    ----------
    reduced_temperature : T/Tc0 of the ideal gas. [1]
    finite_size_shift : -dTc/Tc0. [1]
    scale : `interaction_scale`; NaN where unknown counts as 0. [1]
    """
    t, shift, h = (np.asarray(value, dtype=np.float64) for value in (reduced_temperature, finite_size_shift, scale))
    ideal = 1.0 - t**3
    with np.errstate(invalid="ignore"):
        interaction = zeta(2.0) / zeta(3.0) * np.nan_to_num(h) * np.maximum(ideal, 0.0) ** 0.4
        fraction: Floats = ideal - t**2 * (3.0 * shift + interaction)
    return np.where((fraction >= 0.0) & (ideal >= 0.0), fraction, np.nan)
