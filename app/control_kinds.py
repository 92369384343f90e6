"""What sort of quantity each control of a ramp is: its units, its possible values."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from app.kinds import (
    BEAM_POWER,
    BIAS_FIELD,
    BIAS_FIELD_SPEED,
    CURVATURE_SPEED,
    DEPTH,
    DEPTH_SPEED,
    FIELD_CURVATURE,
    FIELD_GRADIENT,
    GRADIENT_SPEED,
    POWER_SPEED,
    RADIO_FREQUENCY,
    RADIO_FREQUENCY_SPEED,
    SCALE_SPEED,
    Kind,
)
from physics.ramps import Control, Knob

SCALE = Kind(name="scale of the trap", si_unit="", units=("",), low=1e-9, high=1e6, example="0.1")

CONTROL_KINDS: Mapping[Knob, Kind] = MappingProxyType(
    {
        Knob.DEPTH: DEPTH,
        Knob.SCALE: SCALE,
        Knob.POWER: BEAM_POWER,
        Knob.KNIFE: RADIO_FREQUENCY,
        Knob.BIAS: BIAS_FIELD,
        Knob.GRADIENT: FIELD_GRADIENT,
        Knob.CURVATURE: FIELD_CURVATURE,
        Knob.LEVITATION: FIELD_GRADIENT,
    }
)
"""What the values of a control are."""

SPEED_KINDS: Mapping[Knob, Kind] = MappingProxyType(
    {
        Knob.DEPTH: DEPTH_SPEED,
        Knob.SCALE: SCALE_SPEED,
        Knob.POWER: POWER_SPEED,
        Knob.KNIFE: RADIO_FREQUENCY_SPEED,
        Knob.BIAS: BIAS_FIELD_SPEED,
        Knob.GRADIENT: GRADIENT_SPEED,
        Knob.CURVATURE: CURVATURE_SPEED,
        Knob.LEVITATION: GRADIENT_SPEED,
    }
)
"""What the change per second of a control is."""


def control_named(text: str) -> Control:
    """The control that a text names: "depth", "power A", as `Control.label` writes it.

    Raises
    ------
    ValueError : one sentence, for a text that names none.
    """
    name, _, beam = " ".join(text.split()).partition(" ")
    knob = next((knob for knob in Knob if knob.value == name.casefold()), None)
    if knob is None or bool(beam) != (knob is Knob.POWER):
        known = ", ".join(f"{knob.value} BEAM" if knob is Knob.POWER else knob.value for knob in Knob)
        raise ValueError(f'"{text}" is no control; controls are {known}')
    return Control(knob, beam or None)
