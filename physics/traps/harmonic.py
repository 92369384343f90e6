"""A harmonic trap, given by its three ordinary frequencies."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from physics.checks import as_floats, require_positive
from physics.traps.frequencies import ThreeFrequencies


@dataclass(frozen=True, kw_only=True, eq=False)
class HarmonicTrap(ThreeFrequencies):
    """Potential m (wx^2 x^2 + wy^2 y^2 + wz^2 z^2)/2, w = 2 pi f, with gravity already in it.

    Leading dimensions of `frequencies` and those of `depth` broadcast with the atom numbers and temperatures of a
    cloud.

    Attributes
    ----------
    frequencies : (..., 3). [Hz] Ordinary frequencies, not angular ones.
    depth : array_like or None. [J] Energy, from the bottom, at which atoms leave; None where unknown.
        It sets the truncation parameter only: the equilibrium is that of the untruncated harmonic trap.

    Raises
    ------
    ValueError : unless there are three frequencies, all positive and finite, and so is the depth.
    """

    frequencies: Any
    depth: Any = None

    def __post_init__(self) -> None:
        frequencies = as_floats(self.frequencies)
        if frequencies.ndim == 0 or frequencies.shape[-1] != 3:
            shape = "a single number" if frequencies.ndim == 0 else f"shape {frequencies.shape}"
            raise ValueError(f"trap frequencies must be three values in Hz along the last axis, got {shape}")
        require_positive("trap frequency", frequencies, "Hz")
        object.__setattr__(self, "frequencies", frequencies)
        if self.depth is not None:
            depth = as_floats(self.depth)
            require_positive("trap depth", depth, "J")
            object.__setattr__(self, "depth", depth)

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the leading dimensions, depth included."""
        return np.broadcast_shapes(self.frequencies.shape[:-1], np.shape(self.depth))
