"""Traps: potentials that hold a cloud."""

from __future__ import annotations

from physics.traps.beam import GaussianBeam
from physics.traps.coils import Coils, FieldSeeker
from physics.traps.harmonic import HarmonicTrap
from physics.traps.trap import Gravity, Trap

__all__ = ["Coils", "FieldSeeker", "GaussianBeam", "Gravity", "HarmonicTrap", "Trap"]
