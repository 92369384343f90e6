"""What is said of a trap on its page, and of the controls that are turned."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.answers.trap_controls import Control, ControlKind
from app.language import translate as _
from app.trap_words import depth_text, frequencies_text, reason_no_frequencies, reason_not_trapped, sag_text, way_out
from app.units import best_unit, format_quantity
from app.words import temperature, times
from physics.constants import boltzmann

if TYPE_CHECKING:
    from app.answers.trap import TrapAnswer

NO_SCAN = _("This trap is given by its frequencies: there is no power and no gradient to turn.")
NO_SCAN_REMEDY = _("Make the trap of beams or coils, and see here what becomes of it while one of them is turned.")


CONTROL_UNITS = {
    ControlKind.POWER: ("µW", "mW", "W"),
    ControlKind.POWERS: ("",),
    ControlKind.WAIST: ("µm", "mm"),
    ControlKind.GRADIENT: ("G/cm",),
    ControlKind.BIAS: ("mG", "G"),
    ControlKind.CURVATURE: ("G/cm^2",),
    ControlKind.LEVITATION: ("G/cm",),
    ControlKind.KNIFE: ("kHz", "MHz"),
}
"""Units in which each control is shown."""


def control_name(control: Control) -> str:
    """The control in words."""
    if control.kind is ControlKind.POWER:
        return _("power of beam {beam}").format(beam=control.beam)
    if control.kind is ControlKind.WAIST:
        return _("waist of beam {beam}").format(beam=control.beam)
    return {
        ControlKind.POWERS: _("factor on all powers"),
        ControlKind.GRADIENT: _("gradient of the coils"),
        ControlKind.BIAS: _("bias of the coils"),
        ControlKind.CURVATURE: _("curvature of the coils"),
        ControlKind.LEVITATION: _("levitation gradient"),
        ControlKind.KNIFE: _("radio-frequency knife"),
    }[control.kind]


def control_text(control: Control, value: float, digits: int = 5) -> str:
    """A value of the control [SI], with its unit."""
    units = CONTROL_UNITS[control.kind]
    return format_quantity(value, best_unit(value, units), digits=digits)


def trap_sentence(answer: TrapAnswer, kelvin: float) -> str:
    """How stiff, how deep, how far down, or why nothing is held. `kelvin`: temperature of the cloud."""
    if not answer.trapped:
        return _("Not trapped: {reason}.").format(reason=reason_not_trapped(answer))
    found = answer.survey
    parts = [frequencies_text(answer)] if found.frequencies is not None else []
    if found.depth is not None:
        kT = boltzmann * kelvin
        parts.append(_("{depth} deep ({eta} kT)").format(depth=depth_text(answer), eta=times(found.depth / kT)))
    else:
        parts.append(_("depth not given"))
    if found.sag is not None:
        parts.append(_("sag {sag}").format(sag=sag_text(answer)))
    sentence = ", ".join(parts)
    return f"{sentence[0].upper()}{sentence[1:]}."


def trap_detail(answer: TrapAnswer) -> str:
    """How atoms leave, in a quiet sentence; of a trap that holds nothing, what is drawn."""
    if not answer.trapped:
        if answer.survey.potential is None:
            return ""
        return _("Drawn around the focus of the strongest light, or the middle of the coils.")
    if answer.trap.harmonic:
        return ""
    sentences = []
    if answer.survey.frequencies is None:
        sentences.append(_("No frequencies: {why}.").format(why=reason_no_frequencies(answer)))
    leaves = way_out(answer)
    if leaves:
        sentences.append(_("Atoms leave {way}{where}.").format(way=leaves, where=_where(answer)))
    if answer.survey.arm_depth is not None:
        arm = temperature(answer.survey.arm_depth / boltzmann)
        sentences.append(_("From {energy} they spread into the arm of a beam.").format(energy=arm))
    return " ".join(sentences)


def _where(answer: TrapAnswer) -> str:
    """Which way that is, where gravity tells it."""
    escape, down = answer.survey.escape, answer.trap.gravity_direction
    if escape is None or escape.direction is None or down is None:
        return ""
    size = sum(part * part for part in down) ** 0.5
    along = sum(float(a) * b for a, b in zip(escape.direction, down, strict=True)) / size
    return _(", downwards") if along > 0.9 else _(", upwards") if along < -0.9 else _(", sideways")
