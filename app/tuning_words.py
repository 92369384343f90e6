"""What is said of magnetic tuning: which scattering length holds and why, and what can be done where none is known."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.language import translate as _
from app.units import best_unit, format_quantity
from physics.particles import Certainty
from physics.scattering import LengthInUse, WhyUnknown

if TYPE_CHECKING:
    from app.answers.tuning import TuningAnswer
    from app.engine import CloudAnswer

CERTAINTY = {
    Certainty.SEEN: _("seen in its source"),
    Certainty.MEMORY: _("recalled"),
    Certainty.COMPUTED: _("computed"),
}
"""How sure a number of the data is."""

_RESONANCES_NAMED = 4


def field_text(field: float) -> str:
    """A magnetic field with the digits that tell resonances apart."""
    unit = best_unit(field, ("mG", "G")) if field else "G"
    return f"{field / (1e-7 if unit == 'mG' else 1e-4):.7g} {unit}"


def length_text(length: float) -> str:
    """A scattering length, four digits."""
    return format_quantity(length, "a0", digits=4).replace("-", "−")


def length_sentence(cloud: CloudAnswer) -> str:
    """Which scattering length the plan uses, and where it comes from."""
    used, typed, field = cloud.scattering, cloud.plan.species.scattering_length, cloud.plan.species.field
    if typed is not None:
        return _("a = {length}, as typed. It overrides the data at any field.").format(length=length_text(typed.value))
    if field is None:
        if used.value is None:
            return _("No field is given, and {reason}.").format(reason=_reason(used.reason))
        return _("No field is given: a = {length} is used ({certainty}).").format(
            length=length_text(used.value), certainty=_certainty(used.certainty)
        )
    at = field_text(field.value)
    if used.value is None:
        return _("a is not known at {field}: {reason}.").format(field=at, reason=_reason(used.reason))
    if not used.from_resonances:
        return _("a = {length} is used at {field}: the data describe no tuning there ({certainty}).").format(
            length=length_text(used.value), field=at, certainty=_certainty(used.certainty)
        )
    return _("a = {length} at {field} ({certainty}).").format(
        length=length_text(used.value), field=at, certainty=_certainty(used.certainty)
    )


def length_note(used: LengthInUse) -> str:
    """What a field makes of the scattering length, short."""
    if used.value is None:
        return _reason(used.reason)
    if not used.from_resonances:
        return _("no resonance of the data here: a = {length} ({certainty})").format(
            length=length_text(used.value), certainty=_certainty(used.certainty)
        )
    return _("a = {length} at this field ({certainty})").format(
        length=length_text(used.value), certainty=_certainty(used.certainty)
    )


def data_sentence(answer: TuningAnswer) -> str:
    """Which resonances the curve is made of, their zeros, and where the data say nothing."""
    curve = answer.curve
    if curve is None:
        return ""
    parts = [_("Resonances at {fields} ({certainty}).").format(
        fields=_listed(curve.poles), certainty=_certainty(answer.certainty)
    )] if curve.poles else [_("No resonance in this range.")]  # fmt: skip
    if curve.zeros:
        parts.append(_("a = 0 at {fields}.").format(fields=_listed(curve.zeros)))
    if gaps := gap_text(answer):
        parts.append(_("The data say nothing {gaps}.").format(gaps=gaps))
    return " ".join(parts)


def gap_text(answer: TuningAnswer) -> str:
    """Where the data say nothing: "from 150 to 500 G"; empty where they cover all."""
    gaps = () if answer.curve is None else answer.curve.gaps
    return _(" and ").join(
        _("from {low:.4g} to {high:.4g} G").format(low=low * 1e4, high=high * 1e4) for low, high in gaps
    )


def sources_text(answer: TuningAnswer) -> str:
    """Sources of the resonances and what the data say of themselves, one a line."""
    sources = dict.fromkeys(resonance.position.source for resonance in answer.resonances)
    return "\n".join((*sources, *answer.notes))


def no_curve_sentences(answer: TuningAnswer, cloud: CloudAnswer) -> tuple[str, str]:
    """Why there is no curve, and what can be done, for a state that no field tunes."""
    state, used = answer.state, answer.without_field
    what = _("{species}, {state}").format(species=state.key, state=state.name)
    if state.polarised:
        why = _("{what}: fermions in one spin state have no s-wave scattering that a field could tune.").format(
            what=what
        )
        return why, _("Choose a mixture of two spin states.")
    why = _("{what}: the data have no magnetic resonance of this state.").format(what=what)
    if cloud.plan.species.scattering_length is not None:
        why += " " + length_sentence(cloud)
    elif used.value is not None:
        why += " " + _("Its scattering length is {length} ({certainty}) at any field.").format(
            length=length_text(used.value), certainty=_certainty(used.certainty)
        )
    if answer.tunable:
        return why, _("Choose a state that has one, or type a scattering length in the Species form.")
    return why, _("Type a scattering length in the Species form to see what another would do.")


def _listed(fields: tuple[float, ...]) -> str:
    shown = [field_text(field) for field in fields[:_RESONANCES_NAMED]]
    return ", ".join(shown) + (", …" if len(fields) > _RESONANCES_NAMED else "")


def _reason(reason: WhyUnknown | None) -> str:
    return _(reason.value) if reason is not None else _("the scattering length is not known")


def _certainty(certainty: Certainty | None) -> str:
    return _("certainty not stated") if certainty is None else CERTAINTY[certainty]
