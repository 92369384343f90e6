"""What the form of a passenger says beside its fields."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.language import translate as _
from app.tuning_words import CERTAINTY
from app.units import format_quantity

if TYPE_CHECKING:
    from app.candidate_choices import PassengerChoice
    from physics.pair_scattering import PairLength

WHAT = _("Another species, or another state of the same atoms, in the same trap.")


def passenger_summary(passenger: PassengerChoice) -> str:
    """A passenger in a line."""
    return _("{species}, {atoms} at {temperature}").format(
        species=passenger.species.key, atoms=passenger.cloud.atoms.text, temperature=passenger.cloud.temperature.text
    )


def length_told(between: PairLength) -> str:
    """What the data say of the scattering length between two species, for the empty field that it stands in for."""
    if between.value is None:
        return _("not known")
    value = format_quantity(between.value, "a0", digits=4)
    return value if between.certainty is None else f"{value} ({CERTAINTY[between.certainty]})"


def length_source(between: PairLength) -> str:
    """Where that comes from, or why there is none and what is known of other states."""
    if between.value is not None:
        sign = _("magnitude only; ") if between.sign_unknown else ""
        return f"{sign}{between.source}"
    return f"{why_unknown(between)}."


def why_unknown(between: PairLength) -> str:
    """Why there is no scattering length between two species, with what is known of other states; a whole clause."""
    assert between.reason is not None
    said = _(between.reason.value)
    said = f"{said[0].upper()}{said[1:]}"
    if between.others:
        pair = between.others[0]
        names = f"{pair.first[0]} {pair.first[1]} {_('with')} {pair.second[0]} {pair.second[1]}"
        said = f"{said}: {pair.scattering_length.text} {_('of')} {names}"
    return said
