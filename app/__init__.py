"""Coldward: plan the cooling of trapped atoms to a Bose-Einstein condensate or a degenerate Fermi gas."""

__version__ = "0.1.0"

CONTRACT = 1
"""Version of the plan file and of the JSON that the verbs print."""
