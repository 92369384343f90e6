"""Words that every other module shares: which statistics a particle obeys, and how sure a number is."""

from __future__ import annotations

from enum import Enum


class Statistics(Enum):
    """Quantum statistics of identical particles."""

    BOSE = "boson"
    FERMI = "fermion"


class Certainty(Enum):
    """How a number in the data came to be known.

    SEEN: read in the cited source. MEMORY: recalled from it, to be checked before it is cited.
    COMPUTED: worked out from numbers that carry their own certainty.
    """

    SEEN = "seen"
    MEMORY = "memory"
    COMPUTED = "computed"
