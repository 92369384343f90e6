"""The map: atom number against temperature, the cloud on it, and how far it is from the threshold."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, cast

import numpy as np
from contourpy import ContourGenerator, LineType, contour_generator

from app.engine import CloudAnswer, MapAnswer
from app.figures.picture import Array, Axis, Curve, Field, Label, Mark, Picture, Role
from app.figures.ticks import power_text
from app.language import translate as _
from app.words import number, verdict
from physics.models import Model

if TYPE_CHECKING:
    from physics.evaporation import Evaporation

SPLIT = 0.62
"""Place of the threshold in the colour scale: below it the thermal cloud, above it the degenerate one."""

LOWEST_DENSITY = 1e-6
HIGHEST_RATIO = 100.0
LOWEST_RATIO = 0.01
_FRACTIONS = (0.1, 0.5, 0.9)
_RATIOS = (10.0, 1.0, 0.1)
_DECADES = _("phase-space density, decades")
_OWN_THRESHOLD = {
    Model.EXACT_LEVELS: _("exact levels saturated"),
    Model.HARTREE_FOCK: _("Hartree-Fock onset"),
}
_SHORTEST_LABELLED = 12  # points: a contour that only cuts a corner gets no label
_THRESHOLD_DENSITY = 2.612375348685488  # zeta(3/2)


def map_picture(answer: MapAnswer, cloud: CloudAnswer) -> Picture:
    """The map of `answer` with the cloud of `cloud` on it.

    Colour is the peak phase-space density of a thermal Bose gas and T/Tc below its threshold, where the peak is flat;
    for fermions it is T/TF.
    """
    lines = _boson_lines(answer) if answer.bosons else _fermion_lines(answer)
    labels = [label for _curve, found in lines for label in found]
    return Picture(
        title=_("where the cloud stands"),
        x=Axis(
            label=_("atoms N") if cloud.cloud.spin_components == 1 else _("atoms N per spin state"),
            unit="",
            low=answer.limits.atoms_low,
            high=answer.limits.atoms_high,
            log=True,
        ),
        y=Axis(
            label=_("temperature T"),
            unit="K",
            low=answer.limits.temperature_low,
            high=answer.limits.temperature_high,
            log=True,
            prefixed=True,
        ),
        curves=(*(curve for curve, _labels in lines), *_thresholds(answer), *_evaporation(cloud)),
        field=_boson_field(answer) if answer.bosons else _fermion_field(answer),
        marks=(_cloud_mark(cloud),),
        labels=tuple(labels),
        summary=verdict(cloud),
        note="" if answer.complete else _("shown in its place: {model}").format(model=answer.model.label),
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class Track:
    """A simulated ramp on the map. measured : (atoms, temperature [K]) of clouds that were measured on the way."""

    run: Evaporation
    measured: tuple[tuple[float, float], ...] = ()


def with_cloud(ground: Picture, cloud: CloudAnswer, track: Track | None = None) -> Picture:
    """A map of the same gas with another cloud on it: what a drag changes, and nothing else."""
    still = tuple(curve for curve in ground.curves if curve.role is not Role.CLOUD)
    way: tuple[Curve, ...] = ()
    stages: tuple[Mark, ...] = ()
    labels: tuple[Label, ...] = ()
    if track is not None and len(track.run.time):
        way, stages, labels = _way(track), _stage_marks(track), _stage_labels(track, ground)
    return replace(
        ground,
        curves=(*still, *_evaporation(cloud), *way),
        # The cloud last, so that it is on top and first under the pointer.
        marks=(*stages, _cloud_mark(cloud)),
        labels=(*labels, *ground.labels),
        summary=verdict(cloud),
    )


def _way(track: Track) -> tuple[Curve, ...]:
    rows = track.run.rows
    return (Curve(name=_("simulated ramp"), role=Role.TRACK, x=rows.atoms, y=rows.temperature),)


def _stage_marks(track: Track) -> tuple[Mark, ...]:
    """Where each stage ends, and clouds that were measured."""
    rows = track.run.rows
    ends = [
        Mark(name="", role=Role.TRACK, x=float(rows.atoms[stage.last]), y=float(rows.temperature[stage.last]))
        for stage in track.run.stages
    ]
    seen = [
        Mark(name=_("measured"), role=Role.MEASURED, x=atoms, y=kelvin)
        for atoms, kelvin in track.measured
        if math.isfinite(kelvin)
    ]
    return (*ends, *seen)


def _stage_labels(track: Track, ground: Picture) -> tuple[Label, ...]:
    """The number of each stage, a little to the left of where it ends."""
    rows = track.run.rows
    aside = (ground.x.low / ground.x.high) ** 0.035
    return tuple(
        Label(
            text=f"{stage.number + 1}",
            role=Role.TRACK,
            x=float(rows.atoms[stage.last]) * aside,
            y=float(rows.temperature[stage.last]),
        )
        for stage in track.run.stages
    )


def _boson_field(answer: MapAnswer) -> Field:
    low, high = math.log10(LOWEST_DENSITY), math.log10(_THRESHOLD_DENSITY)
    thermal = (np.log10(np.maximum(answer.peak_phase_space_density, LOWEST_DENSITY)) - low) / (high - low)
    condensed = SPLIT + (1.0 - SPLIT) * (1.0 - answer.reduced_temperature)
    shade = np.where(answer.reduced_temperature < 1.0, condensed, SPLIT * np.minimum(thermal, 1.0))
    ticks = [((exponent - low) / (high - low) * SPLIT, power_text(10.0**exponent)) for exponent in range(-6, 1, 2)]
    # Temperatures in words: a bare 1 for T/Tc beside 10⁰ for the density would say two things alike.
    ticks += [
        (SPLIT + (1.0 - SPLIT) * (1.0 - ratio), text) for ratio, text in ((1.0, "Tc"), (0.5, "0.5 Tc"), (0.0, "0"))
    ]
    return Field(
        x=answer.atoms,
        y=answer.temperature,
        shade=shade,
        split=SPLIT,
        bar_label=_("peak phase-space density, then T"),
        ticks=tuple(ticks),
    )


def _fermion_field(answer: MapAnswer) -> Field:
    limit = answer.fermi_threshold
    logs = np.log10(answer.reduced_temperature)
    top, middle, bottom = math.log10(HIGHEST_RATIO), math.log10(limit), math.log10(LOWEST_RATIO)

    def place(log: Array) -> Array:
        thermal = SPLIT * (top - log) / (top - middle)
        degenerate = SPLIT + (1.0 - SPLIT) * (middle - log) / (middle - bottom)
        return np.clip(np.where(log > middle, thermal, degenerate), 0.0, 1.0)

    ticks = sorted({HIGHEST_RATIO, 10.0, 1.0, limit, 0.1, LOWEST_RATIO}, reverse=True)
    return Field(
        x=answer.atoms,
        y=answer.temperature,
        shade=place(logs),
        split=SPLIT,
        bar_label=_("T/TF"),
        ticks=tuple((float(place(np.array(math.log10(tick)))), f"{tick:.3g}") for tick in ticks),
    )


def _boson_lines(answer: MapAnswer) -> list[tuple[Curve, list[Label]]]:
    density = _contours(answer, np.log10(np.maximum(answer.peak_phase_space_density, 1e-30)))
    fraction = _contours(answer, answer.condensate_fraction)
    # The peak is flat once condensed: a contour at 2.612 itself would wander, the threshold has its own line.
    lines = [
        _contour(density, exponent, power_text(10.0**exponent), Role.DECADE, _DECADES if exponent == 0 else "")
        for exponent in range(-12, 1)
    ]
    lines += [
        _contour(
            fraction, share, f"{100 * share:.0f} %", Role.FRACTION, _("condensed fraction") if share == 0.5 else ""
        )
        for share in _FRACTIONS
    ]
    return [line for line in lines if line is not None]


def _fermion_lines(answer: MapAnswer) -> list[tuple[Curve, list[Label]]]:
    logs = _contours(answer, np.log10(answer.reduced_temperature))
    lines = [
        _contour(logs, math.log10(ratio), f"{ratio:g}", Role.DECADE, _("T/TF, decades") if ratio == 1.0 else "")
        for ratio in _RATIOS
    ]
    return [line for line in lines if line is not None]


def _contours(answer: MapAnswer, field: Array) -> ContourGenerator:
    # Contours are straight in logarithms, where interpolating along a cell edge is right too.
    return contour_generator(
        np.log10(answer.atoms), np.log10(answer.temperature), field, name="serial", line_type=LineType.Separate
    )


def _contour(
    contours: ContourGenerator, level: float, text: str, role: Role, name: str
) -> tuple[Curve, list[Label]] | None:
    """A contour as one NaN-broken curve in data coordinates, with its label a fifth of the way along it."""
    pieces = [10.0**piece for piece in cast(list[Array], contours.lines(level)) if len(piece) > 1]
    if not pieces:
        return None
    gap = np.full((1, 2), np.nan)
    points = np.concatenate([part for piece in pieces for part in (piece, gap)])[:-1]
    curve = Curve(name=name, role=role, x=points[:, 0], y=points[:, 1])
    longest = max(pieces, key=len)
    if len(longest) < _SHORTEST_LABELLED:
        return curve, []
    ordered = longest[np.argsort(longest[:, 0])]
    x, y = ordered[len(ordered) // 5 if role is Role.DECADE else 4 * len(ordered) // 5]
    return curve, [Label(text=text, role=role, x=float(x), y=float(y))]


def _thresholds(answer: MapAnswer) -> tuple[Curve, ...]:
    """The ideal threshold, the one with first-order shifts, and that of the model where it has its own."""
    if not answer.bosons:
        name = _("T/TF = {limit}").format(limit=f"{answer.fermi_threshold:.3g}")
        return (Curve(name=name, role=Role.THRESHOLD, x=answer.atoms, y=answer.threshold),)
    lines = [
        (_("condensation, ideal"), Role.THRESHOLD, answer.threshold),
        (_("shifted by size and interaction"), Role.THRESHOLD_SHIFTED, answer.threshold_shifted),
    ]
    if answer.asked in _OWN_THRESHOLD:
        lines.append((_OWN_THRESHOLD[answer.asked], Role.THRESHOLD_OF_MODEL, answer.threshold_of_model))
    return tuple(
        Curve(name=name, role=role, x=answer.atoms, y=np.where(line > 0.0, line, np.nan))
        for name, role, line in lines
        if np.any(line > 0.0)
    )


def _cloud_mark(cloud: CloudAnswer) -> Mark:
    atoms, temperature = cloud.plan.cloud.atoms, cloud.plan.cloud.temperature
    outline = None
    if atoms.sigma or temperature.sigma:
        # Two independent measurements, so that the axes of the ellipse are those of the map.
        angle = np.linspace(0.0, 2.0 * np.pi, 73)
        outline = Curve(
            name="",
            role=Role.UNCERTAINTY,
            x=atoms.value * np.exp((atoms.sigma or 0.0) / atoms.value * np.cos(angle)),
            y=temperature.value * np.exp((temperature.sigma or 0.0) / temperature.value * np.sin(angle)),
        )
    return Mark(name=_("cloud"), role=Role.CLOUD, x=atoms.value, y=temperature.value, draggable=True, outline=outline)


def _evaporation(cloud: CloudAnswer) -> tuple[Curve, ...]:
    """The way of the cloud along an evaporation of the plan's efficiency to the threshold, a power law: in a harmonic
    trap D ~ N^-gamma with D ~ N/T^3 at fixed frequencies is T ~ N^((1 + gamma)/3)."""
    if cloud.efficiency is None:
        return ()
    left, start = float(cloud.equilibrium.atoms_left_at_target), cloud.plan.cloud.temperature.value
    # Beyond the threshold there is no way to go; the curve stays, so that a drag across it redraws nothing else.
    along = np.linspace(0.0, 1.0, 33) if left < 1.0 else np.full(33, np.nan)
    return (
        Curve(
            name=_("evaporation, γ = {gamma}").format(gamma=number(cloud.efficiency, 2)),
            role=Role.CLOUD,
            x=cloud.plan.cloud.atoms.value * left**along,
            y=start * (float(cloud.equilibrium.temperature_at_target) / start) ** along,
        ),
    )
