"""Light on atoms: scalar polarizability of the ground level, light shift, photon scattering.

The polarizability is a sum over the lines of an element where the data have them,

    alpha(w) = constant + sum_k e^2 f_k / (m_e (w_k^2 - w^2)),                          both rotating terms    [1]

and elsewhere the published value at 1064 nm, used within `PUBLISHED_REACH` of that wavelength and refused beyond.
Photons are scattered elastically and by Raman transitions. The lines to one upper J' form a class with its own
polarizability alpha_J', to which the constant and multiplets not resolved in J' contribute alike; then

    alpha = sum_J' c_J' alpha_J',    rate = w^3 I / (6 pi eps0^2 hbar c^4) sum_J' c_J' alpha_J'^2,
    c_J' = (2J'+1) / (3 (2J+1)).

Amplitudes of one class add before they are squared. A single line without constant gives eq. (11) of [1].

Limits. Scalar part only: light that is far from circular polarisation, detuned by more than the hyperfine splittings.
Lines are those of the most used isotope. Closer than `LINE_GUARD` linewidths to a line there is no answer.

References
----------
[1] R. Grimm, M. Weidemueller, Yu. B. Ovchinnikov, Adv. At. Mol. Opt. Phys. 42, 95 (2000), eqs. (10) and (11).
[2] J. Mitroy, M. S. Safronova, C. W. Clark, J. Phys. B 43, 202001 (2010): sums over lines. Recalled.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import Enum
from functools import lru_cache
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats, as_floats, require_positive
from physics.constants import (
    electron_mass,
    elementary_charge,
    reduced_planck,
    speed_of_light,
    vacuum_permittivity,
)

if TYPE_CHECKING:
    from physics.species import Isotope
    from physics.species_tables import Line

PUBLISHED_WAVELENGTH = 1064e-9
"""[m] Where a species without lines has its published polarizability."""

PUBLISHED_REACH = 0.02
"""Relative distance from that wavelength over which the published value is used as it stands. Off by less than 1 %
for atoms whose polarizability rises by up to 15 % from zero frequency to 1064 nm, as that of Dy and Er does."""

LINE_GUARD = 30.0
"""Detuning, in natural linewidths to the ground level, below which a sum over lines is not an answer. The whole
linewidth of a line with other decays is a few times the part that the data have."""

NEAR_RESONANCE = 0.01
"""Relative detuning from a line below which light counts as near resonance: there hyperfine structure and polarisation
shift the answer by percents."""


class PolarizabilitySource(Enum):
    """Where a polarizability is from."""

    LINES = "sum over lines"
    PUBLISHED = "published value"


class NoPolarizability(Enum):
    """Why there is no polarizability to use."""

    NOT_IN_DATA = "the data have neither lines nor a polarizability of this species"
    FAR_FROM_PUBLISHED = "the wavelength is too far from that of the only published polarizability"
    ON_RESONANCE = "the wavelength is within a few linewidths of a line"


@dataclass(frozen=True, kw_only=True)
class Polarizability:
    """Scalar polarizability of the ground level at one wavelength, or why there is none.

    Attributes
    ----------
    wavelength : float. [m] In vacuum.
    value : float or None. [C^2 m^2/J] Negative where light repels the atom (blue detuning).
    mean_square : float or None. [C^4 m^4/J^2] sum_J' c_J' alpha_J'^2, which scatters photons.
    source : PolarizabilitySource or None.
    reason : NoPolarizability or None.
    nearest_line : str. Name of the transition that is nearest in frequency; empty without lines.
    detuning : float or None. (w - w_line)/w_line of that line.
    distance : float or None. Relative distance of the wavelength from that of the published value, where it is used or
        refused.
    """

    wavelength: float
    value: float | None = None
    mean_square: float | None = None
    source: PolarizabilitySource | None = None
    reason: NoPolarizability | None = None
    nearest_line: str = ""
    detuning: float | None = None
    distance: float | None = None

    def __post_init__(self) -> None:
        if (self.value is None) == (self.reason is None):
            raise ValueError("a polarizability needs either a value or a reason, got both or neither")

    @property
    def blue(self) -> bool:
        """Whether light of this wavelength pushes atoms out."""
        return self.value is not None and self.value < 0.0

    @property
    def near_resonance(self) -> bool:
        """Whether a line is closer than `NEAR_RESONANCE`."""
        return self.detuning is not None and abs(self.detuning) < NEAR_RESONANCE


def polarizability(isotope: Isotope, wavelength: float) -> Polarizability:
    """Scalar polarizability of the ground level (of helium: of the metastable one) of an isotope.

    Parameters
    ----------
    isotope : Isotope
    wavelength : float. [m] In vacuum, positive; infinite for a static field.

    Raises
    ------
    ValueError : unless the wavelength is positive.
    """
    if not wavelength > 0.0:
        raise ValueError(f"wavelength must be positive, got {wavelength:g} m")
    lines = _lines(isotope.element)
    if lines is not None:
        return lines.at(wavelength)
    distance = abs(wavelength / PUBLISHED_WAVELENGTH - 1.0)
    if isotope.polarizability_1064 is None:
        return Polarizability(wavelength=wavelength, reason=NoPolarizability.NOT_IN_DATA)
    if distance > PUBLISHED_REACH:
        return Polarizability(wavelength=wavelength, reason=NoPolarizability.FAR_FROM_PUBLISHED, distance=distance)
    alpha = isotope.polarizability_1064.value
    return Polarizability(
        wavelength=wavelength,
        value=alpha,
        mean_square=alpha**2,
        source=PolarizabilitySource.PUBLISHED,
        distance=distance,
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class LineSum:
    """The terms of the polarizability of an element, ready to be summed.

    Attributes
    ----------
    names : (n,) transitions.
    frequencies : (n,). [rad/s]
    strengths : (n,). [C^2/kg] e^2 f/m_e.
    linewidths : (n,). [rad/s] Decay rate to the ground level.
    constant : float. [C^2 m^2/J]
    class_weights : (classes,) c_J' of the classes of upper levels, whose sum is 1.
    membership : (classes, n) Share of each line in each class, such that weights times membership is 1 for every line.
    """

    names: tuple[str, ...]
    frequencies: Floats
    strengths: Floats
    linewidths: Floats
    constant: float
    class_weights: Floats
    membership: Floats

    def value(self, frequency: ArrayLike) -> Floats:
        """Polarizability at angular frequencies of any shape; infinite on a line. [C^2 m^2/J]"""
        return np.tensordot(self.class_values(frequency), self.class_weights, axes=(-1, 0))[()]

    def class_values(self, frequency: ArrayLike) -> Floats:
        """(..., classes) Polarizability of each class of upper levels. [C^2 m^2/J]"""
        w = np.asarray(frequency, dtype=np.float64)[..., np.newaxis]
        with np.errstate(divide="ignore"):
            terms = self.strengths / ((self.frequencies - w) * (self.frequencies + w))
        values: Floats = self.constant + terms @ self.membership.T
        return values

    def at(self, wavelength: float) -> Polarizability:
        """The polarizability at one wavelength [m], or why there is none."""
        w = 0.0 if math.isinf(wavelength) else 2.0 * math.pi * speed_of_light / wavelength
        offsets = w - self.frequencies
        nearest = int(np.argmin(np.abs(offsets)))
        name, detuning = self.names[nearest], float(offsets[nearest] / self.frequencies[nearest])
        if np.any(np.abs(offsets) < LINE_GUARD * self.linewidths):
            return Polarizability(
                wavelength=wavelength, reason=NoPolarizability.ON_RESONANCE, nearest_line=name, detuning=detuning
            )
        classes = self.class_values(w)
        return Polarizability(
            wavelength=wavelength,
            value=float(self.class_weights @ classes),
            mean_square=float(self.class_weights @ classes**2),
            source=PolarizabilitySource.LINES,
            nearest_line=name,
            detuning=detuning,
        )


@lru_cache(maxsize=32)
def _lines(element: str) -> LineSum | None:
    """The terms of an element; None where the data have none."""
    # Imported here: the tables are read only when there is light.
    from physics.species_tables import load_lines

    rows = load_lines(element)
    return line_sum(rows) if any(row.wavelength is not None for row in rows) else None


def line_sum(rows: tuple[Line, ...]) -> LineSum:
    """The sum that rows of the table of lines describe.

    Raises
    ------
    ValueError : for no line, or lines whose lower levels differ.
    """
    lines = [row for row in rows if row.wavelength is not None and row.oscillator_strength is not None]
    lower = {row.J_lower for row in rows}
    if not lines or len(lower) != 1:
        raise ValueError(f"lines must be at least one and share their lower level, got {len(lines)} of J = {lower}")
    (J,) = lower
    uppers = [J_upper for J_upper in (J - 1.0, J, J + 1.0) if J_upper >= 0.0 and not (J == 0.0 and J_upper == 0.0)]
    weights = np.array([(2.0 * J_upper + 1.0) / (3.0 * (2.0 * J + 1.0)) for J_upper in uppers])
    wavelengths = np.array([row.wavelength.value for row in lines if row.wavelength is not None])
    f = np.array([row.oscillator_strength.value for row in lines if row.oscillator_strength is not None])
    frequencies = 2.0 * math.pi * speed_of_light / wavelengths
    membership = np.ones((len(uppers), len(lines)))
    for column, row in enumerate(lines):
        if row.J_upper is not None:
            membership[:, column] = 0.0
            membership[uppers.index(row.J_upper), column] = 1.0 / weights[uppers.index(row.J_upper)]
    # Absorption strength f to the decay rate [1] below eq. (9): the ratio of level sizes is (2J'+1)/(2J+1), and 3 for a
    # whole multiplet of an S level.
    ratio = np.array([3.0 if row.J_upper is None else (2.0 * row.J_upper + 1.0) / (2.0 * J + 1.0) for row in lines])
    radiated = elementary_charge**2 * frequencies**2 / (2.0 * math.pi * vacuum_permittivity * electron_mass)
    return LineSum(
        names=tuple(row.transition for row in lines),
        frequencies=frequencies,
        strengths=elementary_charge**2 * f / electron_mass,
        linewidths=radiated / speed_of_light**3 * f / ratio,
        constant=sum(row.constant.value for row in rows if row.constant is not None),
        class_weights=weights,
        membership=membership,
    )


def light_shift(polarizability: ArrayLike, intensity: ArrayLike) -> Floats:
    """Energy -alpha I/(2 eps0 c) of the ground level in light. [J]

    Parameters
    ----------
    polarizability : array_like. [C^2 m^2/J]
    intensity : array_like. [W/m^2]
    """
    alpha, intensities = as_floats(polarizability), as_floats(intensity)
    shift: Floats = -alpha * intensities / (2.0 * vacuum_permittivity * speed_of_light)
    return shift


def scattering_rate(of: Polarizability, intensity: ArrayLike) -> Floats:
    """Photons scattered per atom and second, elastically or not; NaN without a polarizability. [1/s]

    Parameters
    ----------
    of : Polarizability, at the wavelength of the light.
    intensity : array_like. [W/m^2]
    """
    intensities = as_floats(intensity)
    square = np.nan if of.mean_square is None else of.mean_square
    w = 2.0 * math.pi * speed_of_light / of.wavelength
    factor = w**3 / (6.0 * math.pi * vacuum_permittivity**2 * reduced_planck * speed_of_light**4)
    rate: Floats = factor * square * intensities
    return rate


def tune_out_wavelength(isotope: Isotope, low: float, high: float) -> float | None:
    """The longest wavelength between two [m] at which the polarizability vanishes; None where there is none.

    Only sums over lines have one; sign changes at the lines themselves do not count.
    """
    require_positive("wavelength", as_floats([low, high]), "m")
    lines = _lines(isotope.element)
    if lines is None:
        return None
    edges = [2.0 * math.pi * speed_of_light / wavelength for wavelength in (max(low, high), min(low, high))]
    between = np.sort(lines.frequencies[(lines.frequencies > edges[0]) & (lines.frequencies < edges[1])])
    poles = np.array([edges[0], *between, edges[1]])
    for left, right in pairwise(poles):
        zero = _zero_between(lines, float(left), float(right))
        if zero is not None:
            return 2.0 * math.pi * speed_of_light / zero
    return None


def _zero_between(lines: LineSum, left: float, right: float) -> float | None:
    # Between two poles the sum rises all the way, so that there is at most one zero.
    gap = (right - left) * 1e-12
    low, high = left + gap, right - gap
    if not lines.value(low) < 0.0 < lines.value(high):
        return None
    while high - low > 4.0 * math.ulp(high):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if lines.value(middle) < 0.0 else (low, middle)
    return 0.5 * (low + high)
