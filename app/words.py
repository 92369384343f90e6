"""The sentences that a person reads: verdict, caveats, reasons. No window toolkit; translated by gettext.

Numbers arrive in SI and leave in the units of the trade, rounded to what a reader can use.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from app.answers.uncertainty import MODEL_FREE, Method
from app.language import translate as _
from app.quantities import QUANTITIES, Need, Row, display_factor
from app.units import best_unit, format_quantity

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from app.engine import CloudAnswer

NEAR = 0.05
"""Relative distance from the threshold within which the verdict speaks of "at the threshold"."""


@dataclass(frozen=True)
class Figure:
    """A number that decides: what it is, how much, and a quiet word on it."""

    caption: str
    value: str
    detail: str = ""


def number(value: float, digits: int = 3) -> str:
    """A pure number for reading: "2.61", "0.0123", "1.2e5"."""
    return format_quantity(value, "", digits=digits) if math.isfinite(value) else "–"


def percent(share: float) -> str:
    """A share as percent with sensible digits: "62 %", "0.4 %", "< 0.1 %"."""
    value = 100.0 * share
    if 0.0 < value < 0.1:
        return _("< 0.1 %")
    fine = 0.0 < value < 9.95 or 99.0 < value < 99.95
    return f"{value:.1f} %" if fine else f"{value:.0f} %"


def times(factor: float) -> str:
    """A factor for a sentence: "1.45", "3.0", "12", "3.4e4"."""
    if factor < 9.95:
        return f"{factor:.1f}" if factor >= 2.0 else f"{factor:.2f}"
    return f"{factor:.0f}" if factor < 1e4 else number(factor, 2)


def temperature(value: float) -> str:
    """A temperature in the prefix that suits it."""
    return format_quantity(value, best_unit(value, ("pK", "nK", "µK", "mK", "K")), digits=3)


def verdict(answer: CloudAnswer) -> str:
    """One sentence: where the cloud stands."""
    if answer.overfull:
        return _("There is no such cloud: the trap holds no more than {most} atoms below its depth.").format(
            most=number(_most(answer), 2)
        )
    return _bosons(answer) if answer.bosons else _fermions(answer)


def _most(answer: CloudAnswer) -> float:
    """Atoms that a real trap holds at this temperature."""
    assert answer.real_trap is not None
    return float(answer.cloud.atoms) / float(answer.real_trap.atoms_over_most)


def _bosons(answer: CloudAnswer) -> str:
    solved = answer.equilibrium
    reduced, fraction = float(solved.reduced_temperature), float(solved.condensate_fraction)
    if abs(reduced - 1.0) < NEAR:
        return _("At the edge of condensation: T is {ratio} of the critical temperature.").format(
            ratio=percent(reduced)
        )
    if _straddles(answer, 1.0):
        return _("Condensed or not, within the uncertainty: T is {ratio} of the critical temperature.").format(
            ratio=percent(reduced)
        )
    if reduced < 1.0:
        share = percent(fraction)
        if fraction > 0.9:
            return _("A nearly pure condensate: {share} of the atoms are condensed.").format(share=share)
        return _(
            "Condensed: {share} of the atoms are in the condensate, at {ratio} of the critical temperature."
        ).format(share=share, ratio=percent(reduced))
    density = float(solved.peak_phase_space_density)
    if density > 0.1:
        return _("Close, not condensed: {factor} times too hot for condensation.").format(factor=times(reduced))
    return _("A thermal cloud, {factor} times too hot for condensation.").format(factor=times(reduced))


def _fermions(answer: CloudAnswer) -> str:
    solved = answer.equilibrium
    reduced, limit = float(solved.reduced_temperature), answer.threshold
    if abs(reduced / limit - 1.0) < NEAR:
        return _("At the edge of degeneracy: T/TF = {ratio}.").format(ratio=number(reduced, 2))
    if _straddles(answer, limit):
        return _("Degenerate or not, within the uncertainty: T/TF = {ratio}, and the edge is at {limit}.").format(
            ratio=number(reduced, 2), limit=f"{limit:.3g}"
        )
    if reduced < limit:
        word = _("Deeply degenerate") if reduced < 0.2 else _("Degenerate")
        return _("{word}: T/TF = {ratio}, with {filled} of the lowest level filled.").format(
            word=word, ratio=number(reduced, 2), filled=percent(_occupation(float(solved.log_fugacity)))
        )
    aim = f"{limit:.3g}"
    if reduced < 1.0:
        return _("Partly degenerate at T/TF = {ratio}: {factor} times too hot for T/TF = {limit}.").format(
            ratio=number(reduced, 2), factor=times(reduced / limit), limit=aim
        )
    return _("A thermal cloud: {factor} times too hot for T/TF = {limit}.").format(
        factor=times(reduced / limit), limit=aim
    )


def _occupation(log_z: float) -> float:
    return 1.0 / (1.0 + math.exp(-log_z)) if log_z > -700.0 else 0.0


def _straddles(answer: CloudAnswer, limit: float) -> bool:
    spread = answer.spread("reduced_temperature")
    return spread is not None and float(spread.low) < limit < float(spread.high)


def deciding_figures(answer: CloudAnswer) -> tuple[Figure, ...]:
    """The few numbers that decide, and the distance to the threshold three ways."""
    solved = answer.equilibrium
    if answer.overfull:
        most = _("at most {N}").format(N=number(_most(answer), 2))
        return (Figure(_("atoms"), number(float(answer.cloud.atoms), 2), most),)
    ratio_name = _("T/Tc") if answer.bosons else _("T/TF")
    figures = [
        Figure(
            _("peak phase-space density"),
            number(float(solved.peak_phase_space_density)),
            _quick_range(answer, "peak_phase_space_density") or (_("2.612 condenses") if answer.bosons else ""),
        ),
        Figure(ratio_name, number(float(solved.reduced_temperature)), _quick_range(answer, "reduced_temperature")),
    ]
    if answer.bosons:
        figures.append(
            Figure(
                _("condensed fraction"),
                percent(float(solved.condensate_fraction)),
                _chance(answer) or f"Tc = {temperature(float(solved.critical_temperature))}",
            )
        )
    else:
        figures.append(
            Figure(_("EF/k"), temperature(float(solved.fermi_temperature)), _chance(answer) or _("Fermi energy"))
        )
    return (*figures, *_distances(answer))


def _distances(answer: CloudAnswer) -> tuple[Figure, ...]:
    """How far the threshold is: colder, more atoms, along an evaporation."""
    solved = answer.equilibrium
    colder, more = float(solved.temperature_to_threshold), float(solved.atoms_to_threshold)
    target = temperature(colder * float(np.asarray(answer.cloud.temperature)))
    atoms = number(more * float(np.asarray(answer.cloud.atoms)), 2)
    if colder >= 1.0:
        return (
            Figure(_("below threshold"), f"{times(colder)} ×", _("at this N, up to {T}").format(T=target)),
            Figure(_("atoms to spare"), f"{times(1.0 / more)} ×", _("at this T, down to {N}").format(N=atoms)),
        )
    left = float(solved.atoms_left_at_target)
    evaporation = (
        (Figure(_("or evaporate"), _("{share} left").format(share=percent(left)), _efficiency(answer)),)
        if math.isfinite(left)
        else ()
    )
    return (
        Figure(_("colder by"), f"{times(1.0 / colder)} ×", _("at this N, to {T}").format(T=target)),
        Figure(_("or more atoms by"), f"{times(more)} ×", _("at this T, to {N}").format(N=atoms)),
        *evaporation,
    )


def _efficiency(answer: CloudAnswer) -> str:
    return _("with efficiency γ = {gamma}").format(gamma=number(answer.efficiency or math.nan, 2))


def _quick_range(answer: CloudAnswer, name: str) -> str:
    """The range of a pure number where it is at hand: one that would take many answers does not hold up the verdict."""
    if answer.uncertainty.method is Method.FIRST_ORDER and name not in MODEL_FREE:
        return ""
    return range_text(answer, QUANTITIES[name], "1")


def range_text(answer: CloudAnswer, row: Row, unit: str) -> str:
    """16 to 84 percent of a quantity in one of its units, without the unit; empty where nothing is uncertain, and for
    a quantity with axes."""
    spread = None if row.axes or answer.missing(row) is not None else answer.spread(row.name)
    if spread is None:
        return ""
    factor = display_factor(unit, row)
    low, high = (number(float(bound) / factor) for bound in (spread.low, spread.high))
    return "" if low == high else _("{low} to {high}").format(low=low, high=high)


def _chance(answer: CloudAnswer) -> str:
    share = answer.probability_beyond_threshold
    if share is None:
        return ""
    shown = percent(share) if 0.001 <= share <= 0.999 else (_("> 99.9 %") if share > 0.5 else _("< 0.1 %"))
    if answer.bosons:
        return _("condensed with {share} probability").format(share=shown)
    return _("T/TF < {limit} with {share} probability").format(limit=f"{answer.threshold:.3g}", share=shown)


def reason_missing(need: Need) -> str:
    """Why a quantity has no value."""
    return _("needs {what}").format(what=_(need.value))


def value_text(answer: CloudAnswer, row: Row, unit: str) -> str:
    """A quantity of the answer in one of its units, without the unit; three values for a quantity with axes; "–"
    where it does not apply."""
    return "–" if answer.missing(row) is not None else written(answer.value(row.name), row, unit)


def written(value: float | NDArray[np.float64], row: Row, unit: str) -> str:
    """A value of a quantity in one of its units, without the unit; three where it has axes."""
    factor = display_factor(unit, row)
    if np.ndim(value) == 0:
        return number(float(value) / factor, 4)
    return " × ".join(number(one / factor, 4) for one in np.asarray(value, dtype=float).tolist())


def shown_unit(unit: str) -> str:
    """The unit as it stands behind a value: nothing for a pure number."""
    return "" if unit == "1" else unit


def symbol_of(row: Row, answer: CloudAnswer) -> str:
    """The symbol for the statistics at hand, where a row has one for each: "T/Tc or T/TF"."""
    symbols = row.symbol.split(" or ")
    return symbols[0] if answer.bosons else symbols[-1]


def row_tip(row: Row) -> str:
    """Formula, validity and source of a quantity, for its tip."""
    real = (_("in a trap of beams and coils: {what}").format(what=row.in_real_trap),) if row.in_real_trap else ()
    holds, source = _("holds for: {what}").format(what=row.validity), _("source: {what}").format(what=row.source)
    return "\n".join((row.formula, *real, holds, source))


def heading(answer: CloudAnswer) -> str:
    """What the answer is about: species, state, model."""
    return _("{species}, {state}; model: {model}").format(
        species=answer.state.key, state=answer.state.name, model=answer.model.value
    )


def value_with_interval(answer: CloudAnswer, row: Row) -> str:
    """A quantity in its first unit, with its 16 to 84 percent range where the plan states uncertainties."""
    text = value_text(answer, row, row.units[0])
    between = "" if text == "–" else range_text(answer, row, row.units[0])
    return f"{text}  ({between})" if between else text
