"""What the page of a mixture says: a sentence, what limits the cooling, and the rows of its table."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.answers.trap import trap_answer
from app.language import translate as _
from app.mixture_quantities import MIXTURE_QUANTITIES
from app.mixture_words import mixing_text, mixture_range_text, reason_unknown
from app.quantities import QUANTITIES
from app.trap_words import frequencies_text, reason_no_frequencies, sag_text
from app.tuning_words import CERTAINTY
from app.units import best_unit, format_quantity
from app.words import number, percent, range_text
from physics.constants import boltzmann

if TYPE_CHECKING:
    from app.answers.cloud import CloudAnswer
    from app.answers.mixture import MixtureAnswer

_WHOLE = 0.995  # of the overlap: what is missing is not worth a word


@dataclass(frozen=True)
class MixtureFact:
    """A row: what it is, what there is to say of the first species and of the passenger, and how that is worked out.
    A text of both stands alone; the one for the passenger is empty then."""

    label: str
    first: str
    second: str = ""
    tip: str = ""


def names_of(answer: MixtureAnswer) -> tuple[str, str]:
    """The first species and the passenger; of one isotope with their states, which tell them apart."""
    first, second = answer.coolant.state, answer.state
    if first.key != second.key:
        return first.key, second.key
    return f"{first.key} {first.name}", f"{second.key} {second.name}"


def degeneracy_text(cloud: CloudAnswer) -> str:
    """How degenerate a cloud is, with the range where numbers are uncertain: "T/TF = 0.78 (0.71 to 0.86)"."""
    ratio = _("T/Tc") if cloud.bosons else _("T/TF")
    between = range_text(cloud, QUANTITIES["reduced_temperature"], "1")
    return _bracketed(f"{ratio} = {number(float(cloud.equilibrium.reduced_temperature))}", between)


def _bracketed(text: str, between: str) -> str:
    return f"{text} ({between})" if between else text


# --- sentences -------------------------------------------------------------------------------------------------------


def mixture_sentence(answer: MixtureAnswer, centres: tuple[float, float] | None) -> str:
    """Where the passenger is and how it meets the first species.

    centres : [m] heights of both; None where they are not known
    """
    first, second = names_of(answer)
    if answer.mixture is None:
        why = f": {answer.reason}" if answer.reason else ""
        return _("{second} is not held beside {first}{why}.").format(first=first, second=second, why=why)
    return f"{_where(answer, centres).format(first=first, second=second)}{_overlap(answer)}; {_contact(answer)}."


def _where(answer: MixtureAnswer, centres: tuple[float, float] | None) -> str:
    distance = answer.value("distance")
    if not distance > 1e-12:
        return _("{second} shares the centre of {first}")
    if centres is None or abs(centres[1] - centres[0]) < 0.5 * distance:
        side = _("beside")
    else:
        side = _("above") if centres[1] > centres[0] else _("below")
    return _("{{second}} lies {distance} {side} {{first}}").format(distance=_length(distance), side=side)


def _overlap(answer: MixtureAnswer) -> str:
    share = answer.value("overlap_share")
    if not share < _WHOLE:
        return ""
    return _(" and meets {share} of what it would at its centre").format(share=percent(share))


def _contact(answer: MixtureAnswer) -> str:
    rate, time = answer.value("passenger_collision_rate"), answer.value("relaxation_time")
    if math.isnan(rate):
        return _("how often they collide is not known")
    if not math.isfinite(time):
        return _("they do not collide")
    return _("at {rate} collisions a second per atom of it, their temperatures join in {time}").format(
        rate=number(rate), time=_text(answer, "relaxation_time")
    )


def cooling_sentence(answer: MixtureAnswer) -> str:
    """How far the passenger is from degeneracy, how many the first species can bring there, what condensates do."""
    first, second = names_of(answer)
    if answer.passenger is None or answer.mixture is None:
        return ""
    said = [_("{second} stands at {ratio}.").format(second=second, ratio=degeneracy_text(answer.passenger))]
    most, left = answer.value("most_passengers"), answer.value("coolant_at_threshold")
    if answer.coolant.efficiency is None:
        said.append(_("Give the target an efficiency γ to learn how many {first} can cool.").format(first=first))
    elif math.isfinite(most):
        enough = answer.mixture.all_atoms[1] <= most
        word = _("can cool {most} of it to the threshold") if enough else _("cools no more than {most} of it so far")
        rest = _(", with {left} left").format(left=number(left)) if enough and left > 0.0 else ""
        gamma = number(answer.coolant.efficiency)
        said.append(
            _("At γ = {gamma} {first} {word}{rest}.").format(
                gamma=gamma, first=first, word=word.format(most=number(most)), rest=rest
            )
        )
    mixing = mixing_text(answer.mixture.mixing)
    if mixing:
        said.append(_("Two condensates: {mixing}.").format(mixing=mixing))
    return " ".join(said)


# --- the table -------------------------------------------------------------------------------------------------------


def mixture_facts(answer: MixtureAnswer) -> tuple[MixtureFact, ...]:
    """All numbers of two clouds, those of each side by side."""
    if answer.passenger is None:
        return tuple(_of_one(answer.coolant))
    return (*_of_each(answer, answer.passenger), *_of_both(answer))


def _of_one(cloud: CloudAnswer) -> Iterator[MixtureFact]:
    for label, text, tip in _own(cloud):
        yield MixtureFact(label, text, "–", tip)


def _of_each(answer: MixtureAnswer, passenger: CloudAnswer) -> Iterator[MixtureFact]:
    for (label, first, tip), (other, second, _tip) in zip(_own(answer.coolant), _own(passenger), strict=True):
        yield MixtureFact(label if label == other else f"{label}, {other}", first, second, tip)
    yield _pair(answer, _("collisions with the other, per atom"), "coolant_collision_rate", "passenger_collision_rate")
    yield _pair(answer, _("mean-field shift by the other"), "shift_of_coolant", "shift_of_passenger")


def _own(cloud: CloudAnswer) -> Iterator[tuple[str, str, str]]:
    """Label, text and tip of what a cloud has by itself."""
    solved, plan = cloud.equilibrium, cloud.plan
    yield _("state"), cloud.state.name, ""
    warmth = plan.cloud.temperature.text.replace("uK", "µK")
    yield _("atoms, temperature"), f"{plan.cloud.atoms.text} at {warmth}", _("per spin state")
    row = QUANTITIES["reduced_temperature"]
    yield _("degeneracy"), degeneracy_text(cloud), f"{row.formula}. {row.source}"
    yield (
        _("peak phase-space density"),
        _bracketed(number(float(solved.peak_phase_space_density)), _range(cloud, "peak_phase_space_density", "1")),
        _tip("peak_phase_space_density"),
    )
    yield _("frequencies"), *_frequencies(cloud)
    yield _("sag"), *_sag(cloud)
    depth = cloud.missing(QUANTITIES["truncation"]) is None
    eta = "–"
    if depth:
        eta = _bracketed(f"{number(float(cloud.value('truncation')))} kT", _range(cloud, "truncation", "1"))
    yield _("trap depth"), eta, _tip("truncation")
    yield _("peak density"), _density(float(solved.peak_density)), _tip("peak_density")


def _range(cloud: CloudAnswer, name: str, unit: str) -> str:
    return range_text(cloud, QUANTITIES[name], unit)


def _frequencies(cloud: CloudAnswer) -> tuple[str, str]:
    if cloud.plan.trap.frequencies is not None:
        texts = [frequency.text.removesuffix(" Hz") for frequency in cloud.plan.trap.frequencies]
        return f"{' × '.join(texts)} Hz", _("those that the plan gives")
    trap = trap_answer(cloud.plan)
    return frequencies_text(trap), reason_no_frequencies(trap)


def _sag(cloud: CloudAnswer) -> tuple[str, str]:
    if cloud.plan.trap.harmonic:
        return "–", _("in the frequencies that the plan gives")
    return sag_text(trap_answer(cloud.plan)), _("below where the minimum is without gravity")


def _pair(answer: MixtureAnswer, label: str, first: str, second: str) -> MixtureFact:
    if math.isnan(answer.value(first)):
        return MixtureFact(label, _unknown(answer, first), tip=_mixture_tip(first))
    return MixtureFact(label, _text(answer, first), _text(answer, second), _mixture_tip(second))


def _of_both(answer: MixtureAnswer) -> Iterator[MixtureFact]:
    between = answer.between
    tip = _mixture_tip("scattering_length_between")
    yield MixtureFact(_("scattering length a₁₂"), _length_between(answer), tip=tip)
    if between.value is not None and between.certainty is not None:
        yield MixtureFact(_("its source"), between.source, tip=between.note)
    for name, label in (
        ("distance", _("distance of the minima")),
        ("overlap_share", _("overlap over that of concentric clouds")),
        ("met_density", _("density that a passenger meets")),
        ("relaxation_time", _("rethermalisation time")),
        ("common_temperature", _("temperature after long contact")),
        ("most_passengers", _("heat capacity: passengers that can be cooled")),
        ("coolant_at_threshold", _("first species left then")),
        ("coldest_temperature", _("temperature when the first is used up")),
        ("miscibility_parameter", _("miscibility g₁₂²/(g₁ g₂)")),
        ("bose_fermi_parameter", _("stability of condensate and Fermi gas")),
    ):
        if name in _OF_KINDS and _OF_KINDS[name] != answer.coolant.bosons + _passenger_bosons(answer):
            continue
        known = math.isfinite(answer.value(name))
        text = _text(answer, name) if known else _unknown(answer, name)
        yield MixtureFact(label, f"{text}{_more(answer, name)}" if known else text, tip=_mixture_tip(name))


_OF_KINDS = {"miscibility_parameter": 2, "bose_fermi_parameter": 1}
"""How many of the two are bosons where a quantity means something."""


def _passenger_bosons(answer: MixtureAnswer) -> bool:
    return answer.passenger is not None and answer.passenger.bosons


def _more(answer: MixtureAnswer, name: str) -> str:
    match name:
        case "relaxation_time":
            count = number(answer.value("rethermalisation_collisions"))
            return _(", after {count} collisions").format(count=count)
        case "miscibility_parameter":
            mixing = mixing_text(None if answer.mixture is None else answer.mixture.mixing)
            return f", {mixing}{_unsure(answer, name)}" if mixing else ""
        case "bose_fermi_parameter":
            said = _(", stable") if answer.value(name) < 1.0 else _(", not stable")
            return f"{said}{_unsure(answer, name)}"
        case "most_passengers" if answer.coolant.efficiency is not None:
            return _(", at γ = {gamma}").format(gamma=number(answer.coolant.efficiency))
        case _:
            return ""


def _unsure(answer: MixtureAnswer, name: str) -> str:
    """Said where the border at 1 lies within the range."""
    spread = answer.spreads.get(name)
    return _(", not for sure") if spread is not None and spread.low < 1.0 < spread.high else ""


def _length_between(answer: MixtureAnswer) -> str:
    between = answer.between
    if between.value is None:
        return _unknown(answer, "scattering_length_between")
    value = _bracketed(
        format_quantity(between.value, "a0", digits=4),
        mixture_range_text(answer, "scattering_length_between", lambda length: format_quantity(length, "a0", digits=4)),
    ).replace("-", "−")
    return f"{value}, {between.source if between.certainty is None else CERTAINTY[between.certainty]}"


def _unknown(answer: MixtureAnswer, name: str) -> str:
    return _("not known: {why}").format(why=reason_unknown(answer, name))


def _text(answer: MixtureAnswer, name: str) -> str:
    """A value with its range, in one unit."""
    value = answer.value(name)
    say = _plain(name, value)
    return _bracketed(say(value), mixture_range_text(answer, name, say))


def _plain(name: str, like: float) -> Callable[[float], str]:
    """Says values of a quantity in the unit that suits one of them."""
    match MIXTURE_QUANTITIES[name].unit:
        case "m":
            return _length if like < 1e-12 else _in_unit(best_unit(like, ("nm", "µm", "mm")))
        case "s":
            return _in_unit(best_unit(like, ("s", "ms", "µs")))
        case "K":
            return _in_unit(best_unit(like, _TEMPERATURES))
        case "J":
            unit = best_unit(abs(like) / boltzmann, _TEMPERATURES)
            return lambda value: f"{'−' if value < 0.0 else ''}{_in_unit(unit)(abs(value) / boltzmann)}"
        case "1/m^3":
            return _density
        case "1/s":
            return lambda value: f"{number(value)} /s"
        case _:
            return percent if name == "overlap_share" else number


_TEMPERATURES = ("pK", "nK", "µK", "mK", "K")


def _in_unit(unit: str) -> Callable[[float], str]:
    return lambda value: format_quantity(value, unit, digits=3)


def _length(value: float) -> str:
    if value < 1e-12:  # what is below a picometre is none
        return "0 µm"
    return format_quantity(value, best_unit(value, ("nm", "µm", "mm")), digits=3)


def _density(value: float) -> str:
    return format_quantity(value, "1/cm^3", digits=3).replace("1/cm^3", "cm⁻³")


def _tip(name: str) -> str:
    row = QUANTITIES[name]
    return f"{row.formula}. {row.source}"


def _mixture_tip(name: str) -> str:
    row = MIXTURE_QUANTITIES[name]
    return f"{row.formula}. {row.source}. {row.validity}"
