"""What is said of the inputs of a ramp: their names, and what less and more of one does."""

from __future__ import annotations

import math
from collections.abc import Mapping
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.language import translate as _
from app.words import number, percent
from physics.evaporation import EndReason
from physics.ramp_sensitivity import Input, RampSensitivity

if TYPE_CHECKING:
    from app.answers.ramp_sensitivity import SensitivityAnswer

FIRST_ALONE = _("of the first species alone")

_INPUTS: Mapping[Input, str] = MappingProxyType(
    {
        Input.ATOMS: _("atoms at the start"),
        Input.TEMPERATURE: _("temperature at the start"),
        Input.SCATTERING_LENGTH: _("scattering length"),
        Input.BACKGROUND_LIFETIME: _("background lifetime"),
        Input.TWO_BODY: _("two-body loss K₂"),
        Input.THREE_BODY: _("three-body loss K₃"),
        Input.HEATING: _("heating"),
        Input.INTENSITY_NOISE: _("intensity noise"),
        Input.POINTING_NOISE: _("pointing noise"),
        Input.FREQUENCIES: _("trap frequencies, at this depth"),
        Input.DURATION: _("duration of the ramp"),
        Input.CONTROL: _("calibration of {control}"),
        Input.PASSENGER_ATOMS: _("atoms of the passenger at the start"),
        Input.PASSENGER_TEMPERATURE: _("temperature of the passenger at the start"),
        Input.LENGTH_BETWEEN: _("scattering length between the species"),
    }
)


def input_text(one: RampSensitivity) -> str:
    """The input of a sensitivity, for reading."""
    return _INPUTS[one.input].format(control="" if one.control is None else one.control.label)


def passenger_sensitivity_sentence(found: SensitivityAnswer) -> str:
    """Which input moves T/Tc or T/TF of the passenger most; empty without one, or where that is not known."""
    one = found.strongest_for_passenger()
    if one is None:
        return ""
    ratio = _("T/Tc") if found.passenger_bosons else _("T/TF")
    return _("Most for the passenger: {input}; a tenth of it changes its {ratio} at the end by {share}.").format(
        input=input_text(one), ratio=ratio, share=percent(abs(math.expm1(found.change * one.passenger_slope)))
    )


def change_text(one: RampSensitivity, planned: float) -> tuple[str, str]:
    """What less and what more of an input does to the atoms at the end, for reading."""

    def effect(atoms: float, reason: EndReason, other: EndReason) -> str:
        if not planned > 0.0:
            return number(atoms, 2)
        change = 100.0 * (atoms / planned - 1.0)
        text = f"{change:+.1f} %".replace("-", "−") if abs(change) < 1000.0 else f"{number(atoms / planned, 2)} ×"
        return text if reason is other else f"{text} ({reason.label})"

    return (
        effect(one.atoms_less, one.reason_less, one.reason_more),
        effect(one.atoms_more, one.reason_more, one.reason_less),
    )
