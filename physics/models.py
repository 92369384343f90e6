"""The models by which a cloud can be described, and why one may have to give way to another."""

from __future__ import annotations

from enum import Enum


class Model(Enum):
    """How atoms of a trapped cloud share its levels.

    IDEAL: no interaction, local density (many levels within kT). EXACT_LEVELS: no interaction, the discrete levels
    of the oscillator summed. SEMI_IDEAL: a Thomas-Fermi condensate that repels thermal atoms, which do not repel one
    another. HARTREE_FOCK: thermal atoms repel one another too.
    """

    IDEAL = "ideal"
    EXACT_LEVELS = "exact levels"
    SEMI_IDEAL = "semi-ideal"
    HARTREE_FOCK = "Hartree-Fock"

    @property
    def label(self) -> str:
        return self.value


AVAILABLE_MODELS = tuple(Model)
"""The models that `equilibrium` can use."""


class Replacement(Enum):
    """Why the ideal model stands where another was asked for."""

    LENGTH_UNKNOWN = "scattering length unknown"
    NOT_REPULSIVE = "scattering length not positive"
    BOSONS_ONLY = "model for bosons only"
    HARMONIC_ONLY = "levels of a harmonic trap only"
