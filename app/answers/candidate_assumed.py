"""What is assumed or left out in a number of a comparison, in clauses."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from app.answers.candidate_field import search_text
from app.candidate_columns import Column, Datum, Part
from app.language import translate as _
from app.quantity_row import Need
from app.words import number

if TYPE_CHECKING:
    from app.answers.candidate_row import CandidateRow
    from app.answers.cloud import CloudAnswer

_OF_THRESHOLD = frozenset({"threshold_temperature", "temperature_to_threshold", "atoms_to_threshold"})
_LESS_WITH_LOSSES = frozenset({"total_lifetime", "good_to_bad_ratio", "evaporated_atoms"})
_MORE_WITH_LOSSES = frozenset({"loss_per_rethermalisation", "loss_heating_rate", "heating_rate"})
_OF_LIGHT = frozenset({"light_scattering_rate", "recoil_heating_rate"})
_LIGHT_NEEDS = frozenset({Need.LIGHT, Need.LIGHT_HEATING, Need.HEATING})


def assumptions(row: CandidateRow, column: Column) -> str:
    """What is assumed or left out in a number of a row; empty where nothing is."""
    return "; ".join(_clauses(row, column))


def _clauses(row: CandidateRow, column: Column) -> Iterator[str]:
    cloud = row.cloud
    if row.in_light and Datum.TRAP in column.data:
        scatters = column.name in _OF_LIGHT or bool(_LIGHT_NEEDS & set(column.row.needs))
        said = (scatters and row.trap.light_assumed) or row.trap.assumed
        if said:
            yield said
    if cloud is None:
        return
    if column.name in _OF_THRESHOLD and not cloud.bosons and row.plan.target.reduced_temperature is None:
        limit = f"{cloud.threshold:.3g}"
        yield _("T/TF = {limit} stands for the threshold: the plan's target names none").format(limit=limit)
    if column.part is Part.FIELD and row.search is not None:
        yield search_text(row.search)
    if column.part is Part.CEILING:
        left_out = _losses_left_out(cloud, three_body=False)
        yield _("three-body loss taken at 201 ħa⁴/m, the most that theory allows near a resonance")
        if left_out:
            yield _("without {losses}, of which nothing is known").format(losses=left_out)
    if column.part is Part.EVAPORATION and row.evaporation is not None and row.evaporation.assumed:
        yield row.evaporation.assumed
    if column.name in _LESS_WITH_LOSSES | _MORE_WITH_LOSSES or column.part is Part.EVAPORATION:
        left_out = _losses_left_out(cloud)
        if left_out:
            said = _("without {losses}, of which nothing is known")
            if column.name in _LESS_WITH_LOSSES:
                said = _("without {losses}, of which nothing is known: an upper bound")
            elif column.name in _MORE_WITH_LOSSES:
                said = _("without {losses}, of which nothing is known: a lower bound")
            yield said.format(losses=left_out)
    if Datum.THREE_BODY in column.data and column.part is not Part.CEILING:
        yield from _three_body_elsewhere(cloud)


def _losses_left_out(cloud: CloudAnswer, *, three_body: bool = True) -> str:
    losses = cloud.losses.losses
    known = (
        (_("background gas"), losses.background_lifetime),
        (_("two-body loss"), losses.two_body),
        (_("three-body loss"), losses.three_body if three_body else 0.0),
    )
    return _(" and ").join(word for word, constant in known if constant is None)


def _three_body_elsewhere(cloud: CloudAnswer) -> Iterator[str]:
    if cloud.losses.losses.three_body is None:
        return  # so that no caveat needs to be worked out
    for caveat in cloud.caveats:
        if caveat.id == "three_body_elsewhere" and caveat.value is not None:
            yield _("K₃ was measured at another scattering length: by a⁴ it would be {factor} times").format(
                factor=number(caveat.value, 2)
            )
