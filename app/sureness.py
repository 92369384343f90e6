"""How sure a number is that rests on data of the presets."""

from __future__ import annotations

from enum import Enum

from app.language import translate as _
from physics.particles import Certainty


class Sureness(Enum):
    """From the surest to what is not known at all. A number is as sure as the least sure of all that enters.

    SEEN: given by the user, or read in the cited source. COMPUTED: worked out from other data. RECALLED: from memory of
    its source, to be checked. ASSUMED: something unknown is left out, or a usual value stands for it. UNKNOWN: there is
    no number.
    """

    SEEN = "seen"
    COMPUTED = "computed"
    RECALLED = "recalled"
    ASSUMED = "assumed"
    UNKNOWN = "unknown"

    @property
    def mark(self) -> str:
        """What stands behind a number that is less than seen."""
        return _MARKS[self]

    @property
    def meaning(self) -> str:
        """A few words on it."""
        return _MEANINGS[self]


_MARKS = {
    Sureness.SEEN: "",
    Sureness.COMPUTED: "ᶜ",
    Sureness.RECALLED: "ʳ",
    Sureness.ASSUMED: "ᵃ",
    Sureness.UNKNOWN: "",
}
_MEANINGS = {
    Sureness.SEEN: _("given, or read in its source"),
    Sureness.COMPUTED: _("worked out from other data"),
    Sureness.RECALLED: _("recalled from its source: check it before you rely on it"),
    Sureness.ASSUMED: _("something unknown is left out or assumed"),
    Sureness.UNKNOWN: _("not known"),
}
_ORDER = tuple(Sureness)
_OF_CERTAINTY = {
    Certainty.SEEN: Sureness.SEEN,
    Certainty.COMPUTED: Sureness.COMPUTED,
    Certainty.MEMORY: Sureness.RECALLED,
}


def sureness_of(certainty: Certainty | None) -> Sureness:
    """Of a number of the data; None: typed by the user."""
    return Sureness.SEEN if certainty is None else _OF_CERTAINTY[certainty]


def least_sure(*sureness: Sureness) -> Sureness:
    """The weakest of several; of none, the surest."""
    return max(sureness, key=_ORDER.index, default=Sureness.SEEN)


MARKED = tuple(sure for sure in Sureness if sure.mark)


def legend() -> str:
    """What the marks mean, in one line."""
    return ", ".join([*(f"{sure.mark} {sure.value}" for sure in MARKED), _("– unknown")])
