"""Clouds of which some cells are condensed and others are not, as the semi-ideal models treat them."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from physics.checks import Floats

if TYPE_CHECKING:
    from physics.cloud import Cloud


class CondensedCells:
    """Works out what a condensate changes where there is one, and nowhere else; of an `Equilibrium`."""

    if TYPE_CHECKING:
        cloud: Cloud
        _wavelength: Floats

    @cached_property
    def _is_condensed(self) -> NDArray[np.bool_]:
        """Whether there is a condensate, in any shape that broadcasts to the cloud's."""
        raise NotImplementedError

    @cached_property
    def _condensed(self) -> NDArray[np.bool_]:
        """Cells below threshold, in the full shape of the cloud."""
        return np.broadcast_to(self._is_condensed, self.cloud.shape)

    def _below(self, value: Floats) -> Floats:
        """The condensed cells of a value that broadcasts to the cloud's shape, flat."""
        return np.broadcast_to(value, self.cloud.shape)[self._condensed]

    def _merged(self, above: Floats | float, below: Callable[[], Floats]) -> Floats:
        """One value above threshold, another below; the second is asked for where there are condensed cells only."""
        result = np.array(np.broadcast_to(above, self.cloud.shape), dtype=np.float64)
        if np.any(self._condensed):
            result[self._condensed] = below()
        return result

    @cached_property
    def _density_scale(self) -> Floats:
        """lambda/(2a): n_c lambda^3 is this times (mu - V)/kT. [1]"""
        scale: Floats = self._wavelength / (2.0 * self.cloud.length)
        return scale
