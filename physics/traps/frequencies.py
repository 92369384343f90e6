"""What follows from the three frequencies of a trap, whatever else is known of it."""

from __future__ import annotations

import math
from functools import cached_property
from typing import Any

import numpy as np

from physics.checks import Floats


class ThreeFrequencies:
    """Means and the like of `frequencies`, (..., 3). [Hz] NaN where these are."""

    frequencies: Any

    @cached_property
    def angular_frequencies(self) -> Floats:
        """(..., 3) 2 pi f. [rad/s]"""
        angular: Floats = 2.0 * math.pi * self.frequencies
        return angular

    @cached_property
    def mean_frequency(self) -> Floats:
        """Geometric mean of the three frequencies. [Hz]"""
        mean: Floats = np.cbrt(np.prod(self.frequencies, axis=-1))
        return mean

    @cached_property
    def arithmetic_mean_frequency(self) -> Floats:
        """Arithmetic mean of the three frequencies. [Hz]"""
        mean: Floats = np.mean(self.frequencies, axis=-1)
        return mean
