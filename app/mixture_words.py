"""Two species in one trap in words: caveats, why a number is missing, what two condensates do."""

from __future__ import annotations

import math
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.caveat_words import CaveatLine, line_of
from app.language import translate as _
from app.mixture_quantities import MIXTURE_QUANTITIES
from app.quantities import display_factor
from app.units import format_quantity
from app.words import number, percent, shown_unit, temperature, times
from physics.miscibility import Mixing
from physics.mixture_caveats import MixtureCaveat, MixtureCaveatKind

if TYPE_CHECKING:
    from collections.abc import Callable

    from app.answers.mixture import MixtureAnswer
    from app.answers.sympathetic import SympatheticAnswer
    from app.quantity_row import Row
    from physics.pair_scattering import PairLength


def _length(value: float) -> str:
    return format_quantity(value, "a0", digits=4)


def _time(value: float) -> str:
    return f"{number(value)} s"


_KINDS = MixtureCaveatKind
_SENTENCES: MappingProxyType[MixtureCaveatKind, tuple[str, Callable[[float], str]]] = MappingProxyType(
    {
        _KINDS.PASSENGER_NOT_HELD: (_("The trap does not answer for the passenger{why}."), number),
        _KINDS.BETWEEN_UNKNOWN: (
            _("The scattering length between the two is not known{unknown}: give passenger.scattering_length."),
            number,
        ),
        _KINDS.BETWEEN_RECALLED: (
            _("The scattering length {value} between the two is recalled from its source. Check it before you rely "
              "on it."),
            _length,
        ),
        _KINDS.BETWEEN_COMPUTED: (
            _("The scattering length {value} between the two is worked out from other data, not measured."),
            _length,
        ),
        _KINDS.BETWEEN_SIGN_UNKNOWN: (
            _("Of the scattering length {value} between the two only the magnitude was measured: the sign is assumed."),
            _length,
        ),
        _KINDS.SAME_FREQUENCIES: (
            _("The plan gives frequencies: the passenger is put into the same ones, without a difference in sag. Beams "
              "or coils would give each species its own."),
            number,
        ),
        _KINDS.OWN_FREQUENCIES: (
            _("The plan gives frequencies of each species: both sag by g/ω² along gravity, by linear forces."),
            number,
        ),
        _KINDS.APART: (
            _("Only {value} of the overlap of concentric clouds is left: the minima lie apart, by their sags."),
            percent,
        ),
        _KINDS.DEGENERATE_MIXTURE: (
            _("The classical phase-space density reaches {value}: overlap and heat are those of classical clouds, "
              "estimates here."),
            number,
        ),
        _KINDS.PUSHED: (
            _("The mean field of one is {value} of the energy of the other: they change each other's shape, which is "
              "left out."),
            percent,
        ),
        _KINDS.NOT_MISCIBLE: (
            _("g₁₂²/(g₁ g₂) is {value}: condensates of these two separate, and meet at a border only."),
            number,
        ),
        _KINDS.COLLAPSING: (
            _("g₁₂²/(g₁ g₂) is {value} with attraction between the two: condensates of them collapse together."),
            number,
        ),
        _KINDS.UNSTABLE_WITH_FERMIONS: (
            _("The stability parameter of condensate and Fermi gas is {value}, above 1: they separate or collapse."),
            number,
        ),
        _KINDS.SLOW_CONTACT: (
            _("The two rethermalise in {value} of the shorter lifetime: atoms are lost before heat is exchanged."),
            times,
        ),
        _KINDS.LOSSES_BETWEEN_UNKNOWN: (
            _("Losses in collisions of the two species are left out: the data have none."),
            number,
        ),
        _KINDS.PASSENGER_LEAVES: (_("The passenger is lost at {value}{left}."), _time),
        _KINDS.PASSENGER_CUT: (
            _("The passenger's trap is only {value} kT deep at times: passengers evaporate too, at a rate that is "
              "estimated."),
            number,
        ),
        _KINDS.PASSENGER_BLOCKED: (
            _("At T/TF = {value} filled levels of the passenger block collisions: it cools more slowly than said."),
            number,
        ),
        _KINDS.PASSENGER_LAGS: (
            _("At the end the passenger is {value} times as hot as the first species: it cannot follow. Ramp slower."),
            number,
        ),
        _KINDS.PASSENGER_DEPTH_STAYS: (
            _("The depth moves for the first species only, a cut that the passenger does not see; it keeps {value}."),
            temperature,
        ),
        _KINDS.PASSENGER_DEPTH_UNKNOWN: (
            _("The plan gives no depth of the trap: the passenger keeps the largest of the ramp, {value}."),
            temperature,
        ),
        _KINDS.PASSENGER_AS_SIMULATED: (
            _("What was not measured of the passenger is as the ramp up to the measured cloud is simulated."),
            number,
        ),
        _KINDS.PASSENGER_LENGTH_UNKNOWN: (
            _("The passenger's own scattering length is not known: collisions among passengers are left out."),
            number,
        ),
    }
)  # fmt: skip


def mixture_caveat_text(caveat: MixtureCaveat, between: PairLength, *, why: str = "", left: str = "") -> str:
    """The sentence of a caveat. why : why the passenger is not held; left : why it left."""
    template, say = _SENTENCES[caveat.kind]
    return template.format(
        value="" if caveat.value is None else say(caveat.value),
        unknown=_unknown(between),
        why=f": {why}" if why else "",
        left=f": {left}" if left else "",
    )


def mixture_caveat_lines(answer: MixtureAnswer) -> tuple[CaveatLine, ...]:
    """All caveats of a mixture for reading, gravest first."""
    return tuple(
        line_of(caveat.severity, mixture_caveat_text(caveat, answer.between, why=answer.reason))
        for caveat in answer.caveats
    )


def _unknown(between: PairLength) -> str:
    """Why, and what is known of other states."""
    if between.reason is None:
        return ""
    said = _(between.reason.value)
    if between.others:
        pair = between.others[0]
        names = f"{pair.first[0]} {pair.first[1]} {_('with')} {pair.second[0]} {pair.second[1]}"
        said = f"{said}, {pair.scattering_length.text} {_('of')} {names}"
    return f" ({said})"


def mixing_text(mixing: Mixing | None) -> str:
    """What two condensates do, as a clause; empty where that is not known."""
    return "" if mixing is None else _(mixing.value)


def reason_unknown(answer: MixtureAnswer, name: str) -> str:
    """Why a quantity of a mixture has no value, as a clause."""
    if answer.passenger is None:
        return answer.reason
    if answer.between.reason is not None and name in _NEEDS_LENGTH:
        return _(answer.between.reason.value)
    if name in _NEEDS_EFFICIENCY:
        if answer.coolant.efficiency is None:
            return _("needs an evaporation efficiency in the target")
        return _("the passenger's threshold is passed, or unknown")
    return _(_WHEN.get(name, "not defined for these clouds"))


_NEEDS_LENGTH = frozenset(
    {
        "scattering_length_between",
        "coolant_collision_rate",
        "passenger_collision_rate",
        "relaxation_time",
        "shift_of_passenger",
        "shift_of_coolant",
        "miscibility_parameter",
        "bose_fermi_parameter",
    }
)
_NEEDS_EFFICIENCY = frozenset({"coldest_temperature", "most_passengers", "coolant_at_threshold"})
_WHEN = MappingProxyType(
    {
        "miscibility_parameter": _("needs two Bose gases of one spin state with known repulsive scattering lengths"),
        "bose_fermi_parameter": _("needs a Bose gas with a known repulsive scattering length, and fermions"),
        "relaxation_time": _("the two do not collide"),
    }
)


def mixture_value_text(answer: MixtureAnswer, row: Row, unit: str) -> str:
    """A number in a unit; a dash where there is none."""
    value = answer.value(row.name)
    return number(value / display_factor(unit, row)) if math.isfinite(value) else "–"


def mixture_range_text(answer: MixtureAnswer, name: str, say: Callable[[float], str]) -> str:
    """16 to 84 percent of a number: "12 to 14", with the unit where the two have not the same; empty where nothing is
    uncertain.

    say : a value in words, with or without a unit behind it
    """
    spread = answer.spreads.get(name)
    if spread is None:
        return ""
    low, high = say(float(spread.low)), say(float(spread.high))
    if low == high:
        return ""
    texts = (low, high, say(answer.value(name)))
    if len({text.partition(" ")[2] for text in texts}) == 1:
        low, high = low.partition(" ")[0], high.partition(" ")[0]
    return _("{low} to {high}").format(low=low, high=high)


def mixture_rows(answer: MixtureAnswer) -> list[tuple[str, str, str, str]]:
    """Label, symbol, value with its range, and unit of each quantity that has one."""

    def text(row: Row) -> str:
        factor = display_factor(row.units[0], row)
        between = mixture_range_text(answer, row.name, lambda value: number(value / factor))
        value = mixture_value_text(answer, row, row.units[0])
        return f"{value}  ({between})" if between else value

    return [
        (row.label, row.symbol, text(row), shown_unit(row.units[0]))
        for row in MIXTURE_QUANTITIES.values()
        if math.isfinite(answer.value(row.name))
    ]


# --- along a ramp ----------------------------------------------------------------------------------------------------


def sympathetic_caveat_texts(answer: SympatheticAnswer) -> list[str]:
    """The sentences of all caveats of a ramp with a passenger, gravest first."""
    left = answer.run.passenger.explanation
    return [mixture_caveat_text(caveat, answer.between, why=left, left=left) for caveat in answer.caveats]


def sympathetic_caveat_lines(answer: SympatheticAnswer) -> tuple[CaveatLine, ...]:
    """The same for reading."""
    texts = sympathetic_caveat_texts(answer)
    return tuple(line_of(caveat.severity, text) for caveat, text in zip(answer.caveats, texts, strict=True))


def sympathetic_verdict(answer: SympatheticAnswer) -> str:
    """What becomes of the passenger, in one sentence."""
    run, name = answer.run, answer.states[1].key
    if not len(run.passenger.time):
        why = f": {run.passenger.explanation}" if run.passenger.explanation else ""
        return _("{name} is not held from the start{why}.").format(name=name, why=why)
    end, passenger = run.passenger.final, run.passenger
    ratio = _("T/Tc") if passenger.gas.bosons else _("T/TF")
    said = _("{atoms} atoms of {name} at {temperature}, {ratio} = {value}, {share} of them left").format(
        atoms=number(end["atoms"]),
        name=name,
        temperature=temperature(end["temperature"]),
        ratio=ratio,
        value=number(end["reduced_temperature"]),
        share=percent(end["atoms"] / passenger.budget.atoms_before),
    )
    coolant = float(run.coolant.temperature[len(passenger.time) - 1])
    beside = _("beside {name} at {temperature}").format(name=answer.states[0].key, temperature=temperature(coolant))
    return f"{said}, {beside}."
