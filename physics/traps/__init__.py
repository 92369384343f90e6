"""Traps: potentials that hold a cloud."""

from __future__ import annotations

from physics.traps.harmonic import HarmonicTrap

__all__ = ["HarmonicTrap"]
