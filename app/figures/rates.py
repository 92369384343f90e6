"""All rates of a cloud on one logarithmic axis, so that what limits is seen at once."""

from __future__ import annotations

import math

import numpy as np

from app.engine import Against, RatesAnswer, RateSet
from app.figures.picture import Array, Axis, Curve, Label, Mark, Picture, Role
from app.language import translate as _
from app.units import best_unit, format_quantity
from app.words import number, temperature

_DECADES = 9  # shown at most, from the fastest rate down

_CURVES = (
    ("rethermalisation", _("rethermalisation"), Role.FIRST),
    ("losses", _("all known losses"), Role.TOTAL),
    ("three_body", _("three-body loss"), Role.FOURTH),
    ("two_body", _("two-body loss"), Role.THIRD),
    ("background", _("background loss"), Role.SECOND),
    ("spin_flips", _("spin flips at the field's zero"), Role.THRESHOLD_OF_MODEL),
    ("heating", _("heating, dT/dt over T"), Role.CLASSICAL),
    ("by_light", _("heating by the trap's light"), Role.FRACTION),
)
"""Attribute of `RateSet`, what the legend calls it, and its line."""


def rates_picture(answer: RatesAnswer) -> Picture:
    """Rethermalisation, losses and heating against temperature or atom number, the cloud and the threshold marked."""
    curves = [
        Curve(name=name, role=role, x=answer.grid, y=_drawn(answer.rates, attribute))
        for attribute, name, role in _CURVES
        if _several(answer.rates) or attribute != "losses"
    ]
    curves = [curve for curve in curves if np.any(np.isfinite(curve.y))]
    drawn, axis = bool(curves), _rate_axis(curves)
    labels = []
    # A thin line with a word: a line of the threshold's own would look like that of all losses.
    if answer.grid[0] < answer.threshold < answer.grid[-1]:
        curves.append(_upright(answer.threshold, Role.DECADE, axis))
        foot = axis.low * (axis.high / axis.low) ** 0.05
        labels.append(Label(text=_("threshold"), role=Role.THRESHOLD, x=answer.threshold, y=foot))
    curves.append(_upright(answer.place, Role.CLOUD, axis))
    marks = tuple(
        Mark(name=name, role=Role.CLOUD, x=answer.place, y=float(value))
        for name, value in ((_("cloud"), answer.now.rethermalisation), ("", answer.now.losses))
        if axis.low <= float(value) <= axis.high
    )
    return Picture(
        title=_("how fast atoms rethermalise, are lost and are heated"),
        x=_place_axis(answer),
        y=axis,
        curves=tuple(curves),
        marks=marks,
        labels=tuple(labels),
        summary=limits_sentence(answer.now),
        # A note is redrawn with the data, a title with the frame: what moves with the cloud stands in the note.
        note=_fixed(answer) if drawn else _("no rate is known: give a scattering length and losses"),
    )


def _upright(place: float, role: Role, axis: Axis) -> Curve:
    return Curve(name="", role=role, x=np.array([place, place]), y=np.array([axis.low, axis.high]))


def limits_sentence(now: RateSet) -> str:
    """What limits the cloud, in one sentence: the fastest loss, and how it compares with rethermalisation."""
    losses = {
        _("background gas"): now.background,
        _("two-body collisions"): now.two_body,
        _("three-body collisions"): now.three_body,
        _("spin flips at the zero of the field"): now.spin_flips,
    }
    known = {name: float(rate) for name, rate in losses.items() if float(rate) > 0.0}
    thermal = float(now.rethermalisation)
    known_thermal = math.isfinite(thermal) and thermal > 0.0
    if not known:
        return (
            _("No loss is known; atoms rethermalise in {time}.").format(time=_time(thermal))
            if known_thermal
            else _("Neither losses nor collisions are known.")
        )
    name, rate = max(known.items(), key=lambda item: item[1])
    together = _("Loss by {what} limits the lifetime to {time}, all known losses together to {all}.")
    alone = _("Loss by {what} limits the lifetime to {time}; no other is known.")
    text = (together if len(known) > 1 else alone).format(
        what=name, time=_time(rate), all=_time(float(now.losses))
    )  # fmt: skip
    if not known_thermal:
        return text
    ratio = thermal / float(now.losses)
    return _("{text} Atoms rethermalise in {time}, {ratio} times in that lifetime.").format(
        text=text, time=_time(thermal), ratio=number(ratio, 2)
    )


def _time(rate: float) -> str:
    seconds = 1.0 / rate
    return format_quantity(seconds, best_unit(seconds, ("µs", "ms", "s")), digits=3)


def unknown_sentence(now: RateSet) -> str:
    """What is not known of the cloud's rates, and so not drawn; empty where all is."""
    unknown = [
        name
        for name, rate in (
            (_("collisions (no scattering length)"), now.elastic),
            (_("background lifetime"), now.background),
            (_("two-body constant"), now.two_body),
            (_("three-body constant"), now.three_body),
        )
        if not math.isfinite(float(rate))
    ]
    return _("Not known, and not drawn: {what}.").format(what=", ".join(unknown)) if unknown else ""


def rate_text(rate: float) -> str:
    """A rate as a pointer reads it: with the time that it means."""
    return _("{rate} 1/s, once in {time}").format(rate=number(rate), time=_time(rate))


def _fixed(answer: RatesAnswer) -> str:
    if answer.against is Against.TEMPERATURE:
        return _("at N = {N}").format(N=number(answer.atoms))
    return _("at T = {T}").format(T=temperature(answer.temperature))


def _place_axis(answer: RatesAnswer) -> Axis:
    low, high = float(answer.grid[0]), float(answer.grid[-1])
    if answer.against is Against.TEMPERATURE:
        return Axis(label=_("temperature T"), unit="K", low=low, high=high, log=True, prefixed=True)
    return Axis(label=_("atoms N"), unit="", low=low, high=high, log=True)


def _rate_axis(curves: list[Curve]) -> Axis:
    """Whole decades, at most nine of them from the top: what is slower limits nothing."""
    values = np.concatenate([curve.y[np.isfinite(curve.y)] for curve in curves]) if curves else np.array([1.0])
    top = math.ceil(math.log10(float(values.max())) + 0.05)
    bottom = max(math.floor(math.log10(float(values.min())) - 0.05), top - _DECADES)
    return Axis(label=_("rate, or 1 over lifetime"), unit="1/s", low=10.0**bottom, high=10.0**top, log=True)


def _drawn(rates: RateSet, attribute: str) -> Array:
    """What has a place on a logarithmic axis. Heating of which light is the only part known, as of condensed clouds, is
    drawn as that part: joined to the sum of all parts above the threshold it would look like a jump of the heating."""
    values: Array = getattr(rates, attribute)
    alone = np.isclose(values, rates.by_light, rtol=1e-12, atol=0.0) if attribute == "heating" else False
    return np.where((values > 0.0) & ~np.asarray(alone), values, np.nan)


def _several(rates: RateSet) -> bool:
    """Whether more than one loss is known, so that their sum says something new."""
    parts = rates.background, rates.two_body, rates.three_body, rates.spin_flips
    return sum(bool(np.any(part > 0.0)) for part in parts) > 1
