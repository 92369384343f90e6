"""Caveats in words: what an answer does not cover, by how much, and what to do about it."""

from __future__ import annotations

import math
from dataclasses import dataclass
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.language import translate as _
from app.units import best_unit, format_quantity
from app.words import number, percent, times
from physics.caveats import Caveat, Severity
from physics.models import Model

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from app.engine import CloudAnswer


@dataclass(frozen=True)
class CaveatLine:
    """One caveat for reading: a sign and a word tell its weight, the sentence tells the rest."""

    sign: str
    word: str
    sentence: str


def _length(value: float) -> str:
    return format_quantity(value, "a0", digits=4)


def _two_body(value: float) -> str:
    return format_quantity(value, "cm^3/s", digits=2)


def _three_body(value: float) -> str:
    return format_quantity(value, "cm^6/s", digits=2)


def _density(value: float) -> str:
    return format_quantity(value, "1/cm^3", digits=2)


def _whole(value: float) -> str:
    return f"{value:.0f}" if value < 1e4 else number(value)


def _share(value: float) -> str:
    """A share that can be reckoned above one, where it says no more than "all"."""
    return percent(value) if value < 1.0 else _("all")


def _once_in(rate: float) -> str:
    """A rate as the time that it means."""
    seconds = 1.0 / rate if rate > 0.0 else math.inf
    return format_quantity(seconds, best_unit(seconds, ("ms", "s", "h")), digits=2)


def _heating(value: float) -> str:
    return format_quantity(value, best_unit(value, ("nK/s", "µK/s")), digits=2)


_PLAIN: Callable[[float], str] = number
_SENTENCES: MappingProxyType[str, tuple[str, Callable[[float], str]]] = MappingProxyType(
    {
        "model_length_unknown": (
            _("The scattering length is not known{why}, so the ideal gas is used. Type one, or a field."),
            _PLAIN,
        ),
        "model_not_repulsive": (
            _("The scattering length is {value}, not repulsive, so the ideal gas is used."),
            _length,
        ),
        "model_bosons_only": (_("The model {asked} describes bosons; the ideal Fermi gas is used."), _PLAIN),
        "model_harmonic_only": (
            _("Exact levels are known of a harmonic trap only; in this one the ideal gas in local density is used."),
            _PLAIN,
        ),
        "length_unknown": (
            _("The scattering length is not known{why}: collision rates and shifts by interaction are left out."),
            _PLAIN,
        ),
        "length_recalled": (
            _("The scattering length {value} is recalled from its source. Check it before you rely on it."),
            _length,
        ),
        "length_computed": (
            _("The scattering length {value} is worked out from other data. Type a measured one if you have it."),
            _length,
        ),
        "finite_size": (
            _("The trap's finite size lowers Tc by {value}: see the shifted critical temperature."),
            percent,
        ),
        "local_density_bosons": (
            _("Levels are coarse, ħω/kTc = {value}: local density is off here. Compare with exact levels."),
            _PLAIN,
        ),
        "local_density_fermions": (
            _("Levels are coarse: local density counts the atoms {value} off at the same EF. Use exact levels."),
            percent,
        ),
        "exact_levels_advised": (
            _("The highest level spacing is {value} kT: local density does not describe this cloud. Use exact levels."),
            _PLAIN,
        ),
        "exact_levels_advised_shift": (
            _("So few atoms lower Tc by {shift}: local density is far off near it. Use exact levels."),
            _PLAIN,
        ),
        "shell_structure": (
            _("kT is only {value} of the highest level spacing: shells of the oscillator show. See exact levels."),
            _PLAIN,
        ),
        "low_dimension_bosons": (
            _("The highest level spacing is {value} kT, {frozen}: the gas is not three-dimensional. Use exact levels."),
            _PLAIN,
        ),
        "low_dimension_fermions": (
            _("The Fermi energy is only {value} level spacings, {frozen}: not three-dimensional. Use exact levels."),
            _PLAIN,
        ),
        "frozen_thermal": (
            _("The highest level spacing is {value} kT: the few thermal atoms are not three-dimensional."),
            _PLAIN,
        ),
        "few_atoms": (
            _("With {value} atoms, means at a fluctuating number differ from those at a fixed one."),
            _whole,
        ),
        "thomas_fermi": (
            _("N₀a/a_ho is {value}: the condensate is too small for the Thomas-Fermi shape, which is used."),
            _PLAIN,
        ),
        "near_threshold": (
            _("At T/Tc = {value} the repulsion among thermal atoms counts, and the semi-ideal model leaves it out."),
            _PLAIN,
        ),
        "attractive": (
            _("Atoms attract (a = {value}): a condensate collapses above about {collapse} atoms."),
            _length,
        ),
        "collapse": (
            _("The condensate would hold {value} times the {collapse} atoms at which attraction makes it collapse."),
            times,
        ),
        "dipolar": (
            _("The dipolar length {dipole} is {value} of a: dipoles shape the cloud, and this answer leaves them out."),
            _PLAIN,
        ),
        "dipolar_unstable": (
            _("The dipolar length {dipole} is {value} a: above 1 dipoles make a round condensate collapse. Raise a."),
            _PLAIN,
        ),
        "density_jump": (
            _("At the condensate's edge the density jumps by {value}, an artefact of the mean field: trust sums only."),
            percent,
        ),
        "dense": (_("n|a|³ reaches {value}: the gas is too dense for mean-field formulas. Weaken the trap."), _PLAIN),
        "long_range_length": (
            _("|a|/λ is {value}: interactions shift all near the threshold by several percent. See Hartree-Fock."),
            _PLAIN,
        ),
        "fermi_interaction": (
            _("kF|a| is {value} (1/kFa = {inverse}): this ideal gas has no such interaction. See the estimates."),
            _PLAIN,
        ),
        "polarised_fermions": (
            _("One spin state of a fermion has no s-wave collisions: it neither rethermalises nor evaporates alone."),
            _PLAIN,
        ),
        "pauli_blocking": (
            _("At T/TF = {value} filled levels block collisions; the collision rate leaves that out."),
            _PLAIN,
        ),
        "hydrodynamic": (
            _("Atoms collide {value} times per radian of the fastest axis: the cloud is hydrodynamic there."),
            _PLAIN,
        ),
        "no_background": (
            _("No background lifetime is given: lifetimes and the ratio of collisions are upper bounds. Type one."),
            _PLAIN,
        ),
        "three_body_unknown": (
            _("The three-body rate constant is not known: lifetimes leave that loss out. Type it if you have it."),
            _PLAIN,
        ),
        "two_body_recalled": (
            _("The two-body rate constant {value} is recalled from its source. Check it before you rely on it."),
            _two_body,
        ),
        "three_body_recalled": (
            _("The three-body rate constant {value} is recalled from its source. Check it before you rely on it."),
            _three_body,
        ),
        "three_body_scaling": (
            _("K₃ is {value} times what resonant three-body loss at this scattering length can be. Check K₃ and a."),
            times,
        ),
        "three_body_unitarity": (
            _("K₃ is {value} times what is possible at this temperature. Type a smaller one: this loss is too fast."),
            times,
        ),
        "three_body_elsewhere": (
            _("K₃ of the data belongs to another scattering length; by a⁴ it changes {value} times. Type yours."),
            times,
        ),
        "loss_fast": (
            _("In one rethermalisation time {value} of the atoms are lost: no equilibrium. Compress, or lose less."),
            _share,
        ),
        "heating_fast": (
            _("T rises by {value} in one rethermalisation time: no steady cloud. Compress, or lower light and noise."),
            percent,
        ),
        "loss_ideal_condensate": (
            _("Losses reckon with a condensate without repulsion, of {value}. A real one is thinner: use semi-ideal."),
            _density,
        ),
        "dipolar_fast": (
            _("k a_d is {value}: these dipoles are too fast for the cross-section that is used, which is an estimate."),
            _PLAIN,
        ),
        "harmonic_trap": (
            _(
                "Answered in the real trap{cut} where a classical cloud fills {value} times the volume that it has in "
                "the harmonic trap of the same frequencies{arms}.{compared}"
            ),
            times,
        ),
        "trap_uncertainty": (
            _("One uncertain number of beams or coils moves the trap by {value}: ranges are rough. Calibrate it."),
            percent,
        ),
        "shallow": (
            _(
                "The trap is only {value} kT deep: atoms evaporate fast, and the cloud is in equilibrium for a short "
                "time only. Deepen or cool."
            ),
            _PLAIN,
        ),
        "overfull": (
            _("These are {value} times as many atoms as the trap holds below its depth: there is no such cloud."),
            _PLAIN,
        ),
        "no_frequencies": (
            _(
                "This trap has no frequencies, so that whatever needs them is not known; the answer counts its levels "
                "as if they lay close."
            ),
            _PLAIN,
        ),
        "open_trap": (
            _(
                "Nothing closes this trap towards its depth, where its volume grows without end: atoms above {value} "
                "of the depth are taken as lost."
            ),
            percent,
        ),
        "one_way_out": (
            _(
                "Only {value} of all directions lead out of this trap. Atoms must find that way: evaporation is slower "
                "than ramps here say."
            ),
            percent,
        ),
        "spin_flips": (
            _(
                "Atoms lose their state at the zero of the field, each in about {value} ({least} to {largest}), and "
                "sooner as they cool. Plug the zero, or add a bias."
            ),
            _once_in,
        ),
        "light_heating": (
            _(
                "Scattered light warms the cloud by {value}, {share} of T in the {time} that it lasts. Less power, or "
                "light further from the lines, heats less."
            ),
            _heating,
        ),
        "truncated": (
            _("The trap is only {value} kT deep: it cuts the cloud, which is answered as if uncut. Deepen or cool."),
            _PLAIN,
        ),
    }
)
_SIGNS = MappingProxyType({Severity.NOTE: "○", Severity.WARNING: "△", Severity.REFUSAL: "■"})
_WORDS = MappingProxyType(
    {Severity.NOTE: _("Note"), Severity.WARNING: _("Take care"), Severity.REFUSAL: _("Not this cloud")}
)


def caveat_text(caveat: Caveat, answer: CloudAnswer) -> str:
    """The sentence of a caveat, with its number."""
    key = _key(caveat, answer)
    if key not in _SENTENCES:
        return _of_trap(caveat)
    template, say = _SENTENCES[key]
    numbers = caveat.numbers
    asked = answer.plan.cloud.model or Model.SEMI_IDEAL
    return template.format(
        value="" if caveat.value is None else say(caveat.value),
        why=_why_unknown(answer),
        asked=asked.value,
        dipole=_length(numbers.get("dipolar_length", 0.0)),
        collapse=number(numbers.get("collapse_atoms", 0.0), 2),
        inverse=number(numbers.get("inverse", 0.0), 2),
        shift=percent(numbers.get("shift", 0.0)),
        cut=_cut(numbers.get("truncation")),
        arms=_arms(numbers.get("arms"), numbers.get("in_arms")),
        compared=_compared(numbers, answer),
        frozen=_frozen(int(numbers.get("frozen_axes", 0))),
        least=_once_in(numbers.get("largest", 0.0)),
        largest=_once_in(numbers.get("least", 0.0)),
        share=percent(numbers.get("share", 0.0)),
        time=_once_in(1.0 / numbers.get("time", math.inf)),
    )


def _of_trap(caveat: Caveat) -> str:
    """The sentence of a note on the trap."""
    from app.trap_words import note_text  # what it loads is there, where there is a trap to speak of
    from physics.traps.notes import Note, NoteKind

    return note_text(Note(kind=NoteKind[caveat.id.upper()], value=caveat.value or 0.0, beam=caveat.subject))


def caveat_line(caveat: Caveat, answer: CloudAnswer) -> CaveatLine:
    """A caveat for reading: sign, word and sentence."""
    return line_of(caveat.severity, caveat_text(caveat, answer))


def line_of(severity: Severity, sentence: str) -> CaveatLine:
    """A sentence with the sign and the word of its weight."""
    return CaveatLine(_SIGNS[severity], _WORDS[severity], sentence)


def caveat_lines(answer: CloudAnswer) -> tuple[CaveatLine, ...]:
    """All caveats of an answer, gravest first, and beams and coils of its plan that stand beside trap frequencies."""
    sentence = _("The section [{name}] of the plan is kept, and not used: the trap frequencies are given.")
    unused = tuple(
        CaveatLine(_SIGNS[Severity.NOTE], _WORDS[Severity.NOTE], sentence.format(name=name))
        for name in answer.plan.unused
        if answer.plan.trap.harmonic
    )
    return (*(caveat_line(caveat, answer) for caveat in answer.caveats), *unused)


def _key(caveat: Caveat, answer: CloudAnswer) -> str:
    if "shift" in caveat.numbers:
        return f"{caveat.id}_shift"
    if caveat.id in ("local_density", "low_dimension"):
        return f"{caveat.id}_{'bosons' if answer.bosons else 'fermions'}"
    return caveat.id


def _why_unknown(answer: CloudAnswer) -> str:
    reason = answer.scattering.reason
    return "" if reason is None else f" ({_(reason.value)})"


def _frozen(axes: int) -> str:
    return _("one axis is frozen out") if axes == 1 else _("{count} axes are frozen out").format(count=axes)


def _cut(truncation: float | None) -> str:
    return "" if truncation is None else _(", {depth} kT deep,").format(depth=times(truncation))


def _arms(truncation: float | None, share: float | None) -> str:
    if truncation is None or share is None:
        return ""
    return _(": {share} of it lies in the arms, which open at {energy} kT").format(
        share=percent(share), energy=times(truncation)
    )


def _compared(numbers: Mapping[str, float], answer: CloudAnswer) -> str:
    if "real" not in numbers or "harmonic" not in numbers:
        return ""
    symbol = "T/Tc" if answer.bosons else "T/TF"
    said = _(" There {symbol} would be {harmonic} instead of {real}{density}.")
    density = ""
    if "real_density" in numbers:
        density = _(", and D {harmonic} instead of {real}").format(
            harmonic=number(numbers["harmonic_density"]), real=number(numbers["real_density"])
        )
    return said.format(
        symbol=symbol, harmonic=number(numbers["harmonic"]), real=number(numbers["real"]), density=density
    )
