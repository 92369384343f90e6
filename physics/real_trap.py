"""A trap as its survey found it, for the clouds in it: how much room there is below each energy, up to the depth."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING, Any
from weakref import WeakKeyDictionary

import numpy as np
from numpy.typing import ArrayLike

from physics.checks import Floats, as_floats, require_positive
from physics.curve_shape import CurveShape
from physics.level_sums import LevelSums, level_unit
from physics.traps.frequencies import ThreeFrequencies
from physics.traps.harmonic import HarmonicTrap

if TYPE_CHECKING:
    from physics.real_hartree_fock_integrals import MeanField
    from physics.real_semi_ideal_integrals import CondensateSums
    from physics.traps.survey import Survey


@dataclass(frozen=True, kw_only=True, eq=False)
class RealTrap(ThreeFrequencies):
    """A trap of any volume curve W(U), of a finite depth.

    Leading dimensions of `held`, `volume`, `depth` and `frequencies` broadcast with a cloud's numbers; all of them have
    one shape of the curve.

    Attributes
    ----------
    mass : float. [kg] Of the atoms that it was surveyed for.
    curve : CurveShape. W over its value at the highest energy that is held, against the energy over that.
    held : array_like. [J] Highest energy, from the bottom, of atoms that are held: the depth, or the energy up to which
        the curve is known where that is less.
    volume : array_like. [m^3] W there.
    depth : array_like or None. [J] From the bottom; None is `held`.
    frequencies : (..., 3) or None. [Hz] Ordinary ones of the bottom; None where it is not harmonic.

    Raises
    ------
    ValueError : unless all numbers are positive and finite, and there are three frequencies or none.
    """

    mass: float
    curve: CurveShape
    held: Any
    volume: Any
    depth: Any = None
    frequencies: Any = None

    def __post_init__(self) -> None:
        depth = self.held if self.depth is None else self.depth
        for name, value, quantity, unit in (
            ("mass", self.mass, "mass", "kg"),
            ("held", self.held, "highest energy that is held", "J"),
            ("volume", self.volume, "volume of the trap", "m^3"),
            ("depth", depth, "trap depth", "J"),
        ):
            number = as_floats(value)
            require_positive(quantity, number, unit)
            object.__setattr__(self, name, number)
        unknown = self.frequencies is None or bool(np.all(np.isnan(self.frequencies)))
        frequencies = as_floats(np.full(3, np.nan)) if unknown else self.harmonic_trap.frequencies
        object.__setattr__(self, "frequencies", frequencies)

    @property
    def harmonic_trap(self) -> HarmonicTrap:
        """The harmonic trap of the same frequencies and depth.

        Raises
        ------
        ValueError : for a trap without frequencies.
        """
        return HarmonicTrap(frequencies=self.frequencies, depth=self.depth)

    @property
    def has_frequencies(self) -> bool:
        return bool(np.all(np.isfinite(self.frequencies)))

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the leading dimensions."""
        return np.broadcast_shapes(
            np.shape(self.held), np.shape(self.volume), np.shape(self.depth), self.frequencies.shape[:-1]
        )

    @cached_property
    def levels(self) -> LevelSums:
        """Sums over the levels of this shape of the curve."""
        return LevelSums(shape=self.curve)

    @cached_property
    def condensates(self) -> CondensateSums:
        """Sums around a condensate in this shape of the curve."""
        from physics.real_semi_ideal_integrals import CondensateSums

        return CondensateSums(shape=self.curve)

    @cached_property
    def mean_field(self) -> MeanField:
        """The Hartree-Fock mean field in this shape of the curve."""
        from physics.real_hartree_fock_integrals import MeanField

        return MeanField(shape=self.curve, condensates=self.condensates)

    @cached_property
    def level_unit(self) -> Floats:
        """The number of levels in whose units `levels` counts. [1]"""
        return level_unit(self.mass, self.held, self.volume)

    def resized(self, *, depth: ArrayLike = 1.0, frequencies: ArrayLike = 1.0, room: ArrayLike = 1.0) -> RealTrap:
        """The same shape of the curve with another depth, other frequencies and another volume at low energies.

        Parameters
        ----------
        depth : [1] Factor of the depth; that of the volume there follows from the power law of the bottom.
        frequencies : (..., 3). [1] Factors. They do not change the volume: that is `room`.
        room : [1] Factor of the volume at a low energy, 1 over that of the three frequencies.
        """
        deeper = np.asarray(depth, dtype=np.float64)
        return self.with_numbers(
            held=self.held * deeper,
            volume=self.volume * np.asarray(room) * deeper**self.curve.exponent,
            depth=self.depth * deeper,
            frequencies=self.frequencies * np.asarray(frequencies),
        )

    def with_numbers(self, *, held: ArrayLike, volume: ArrayLike, depth: ArrayLike, frequencies: ArrayLike) -> RealTrap:
        """The same shape of the curve with other numbers; what was worked out for the shape is kept."""
        other = replace(
            self, held=held, volume=volume, depth=depth, frequencies=frequencies if self.has_frequencies else None
        )
        other.__dict__.update(levels=self.levels, condensates=self.condensates)
        return other


_OF_SURVEYS: WeakKeyDictionary[Survey, RealTrap] = WeakKeyDictionary()


def real_trap(found: Survey) -> RealTrap:
    """The trap of a survey, as clouds see it; the same one as long as there is the survey, with its tables.

    Raises
    ------
    ValueError : where the survey found nothing that holds atoms, or the depth is not known.
    """
    if found.reason is not None:
        raise ValueError(f"a cloud needs a trap that holds it, got one where {found.reason.value}")
    kept = _OF_SURVEYS.get(found)
    if kept is None:
        held, volume, curve = held_curve(found)
        kept = RealTrap(
            mass=found.mass, curve=curve, held=held, volume=volume, depth=found.depth, frequencies=found.frequencies
        )
        _OF_SURVEYS[found] = kept
    return kept


def held_curve(found: Survey) -> tuple[float, float, CurveShape]:
    """Highest energy that is held [J], the volume there [m^3] and the shape of the curve below.

    The volume of a focused beam without gravity has no end at the depth; there 0.95 of it is the highest energy.
    Elsewhere the last step of the volume curve is carried on to the depth, where counting ended a little below.

    Raises
    ------
    ValueError : where the depth is not known.
    """
    curve = found.volume_curve
    if found.depth is None or curve is None:
        raise ValueError("a volume curve needs a trap of known depth")
    energies, volumes = np.asarray(curve.energies), np.asarray(curve.volumes)
    # Counted volumes may stand still between two energies.
    rising = np.concatenate([[True], np.diff(np.maximum.accumulate(volumes)) > 1e-9 * volumes[1:]])
    rising[-1] = True
    energies, volumes = energies[rising], volumes[rising]
    if len(volumes) > 1 and volumes[-1] <= volumes[-2]:
        energies, volumes = np.delete(energies, -2), np.delete(volumes, -2)
    held = float(energies[-1]) if found.volume_curve_ceiling is not None else float(found.depth)
    if held > energies[-1] * (1.0 + 1e-9) and len(energies) > 4:
        growth = math.log(volumes[-1] / volumes[-4]) / math.log(energies[-1] / energies[-4])
        volumes = np.append(volumes, volumes[-1] * (held / energies[-1]) ** growth)
        energies = np.append(energies, held)
    held, volume = float(energies[-1]), float(volumes[-1])
    return held, volume, CurveShape(energies=energies / held, volumes=volumes / volume, exponent=curve.power)
