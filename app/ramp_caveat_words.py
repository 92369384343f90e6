"""What a simulated ramp does not cover: a sentence for each caveat, and how grave each is."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.language import translate as _
from app.units import format_quantity
from app.words import number, percent, times
from physics.caveats import Severity
from physics.ramp_caveats import RampCaveat, RampCaveatKind

if TYPE_CHECKING:
    pass

SIGNS: Mapping[Severity, str] = MappingProxyType({Severity.NOTE: "○", Severity.WARNING: "△", Severity.REFUSAL: "■"})
WEIGHTS: Mapping[Severity, str] = MappingProxyType(
    {Severity.NOTE: _("Note"), Severity.WARNING: _("Take care"), Severity.REFUSAL: _("Not this cloud")}
)

_PLAIN: Callable[[float], str] = number


def _length(value: float) -> str:
    return format_quantity(value, "a0", digits=4)


_CAVEATS: Mapping[RampCaveatKind, tuple[str, Callable[[float], str]]] = MappingProxyType(
    {
        RampCaveatKind.POLARISED: (
            _("Fermions of one spin state do not collide at these energies: this cloud does not evaporate by itself."),
            _PLAIN,
        ),
        RampCaveatKind.SHALLOW: (
            _("The trap gets as shallow as {value} kT: the cut thermal distribution is an estimate below 5."),
            _PLAIN,
        ),
        RampCaveatKind.ESTIMATES: (
            _("The classical phase-space density reaches {value}: N and T are estimates from 0.3 on."),
            _PLAIN,
        ),
        RampCaveatKind.FAST_TRAP: (
            _("The trap changes fast, |dω/dt|/ω² = {value}: the cloud follows smoothly below 0.1. Take more time."),
            _PLAIN,
        ),
        RampCaveatKind.FAST_DEPTH: (
            _("The depth falls by {value} of itself in a rethermalisation time: collisions do not keep up. Slow down."),
            times,
        ),
        RampCaveatKind.HYDRODYNAMIC: (
            _("Atoms collide {value} times per radian of the fastest axis: they do not leave freely, and fewer do."),
            _PLAIN,
        ),
        RampCaveatKind.FAST_LOSS: (
            _("In one rethermalisation time {value} of the atoms are lost without cooling: no equilibrium."),
            percent,
        ),
        RampCaveatKind.ONE_WAY_OUT: (
            _(
                "Only {value} of all directions lead out of this trap: evaporation is slower than this answer, an "
                "upper bound, says."
            ),
            percent,
        ),
        RampCaveatKind.TRANSFER_APART: (
            _(
                "Two traps of a sudden transfer have their minima {value} cloud radii apart: the cloud swings there, "
                "and all of that energy counts as heat at once."
            ),
            _PLAIN,
        ),
        RampCaveatKind.PAULI_BLOCKING: (
            _("T/TF falls to {value}: filled levels block collisions, which is left out, and evaporation is slower."),
            _PLAIN,
        ),
        RampCaveatKind.LIGHT_HEATING: (
            _("Scattered light brings in {value} of the energy at the end. Lower powers sooner, or detune further."),
            percent,
        ),
        RampCaveatKind.SPIN_FLIPS: (
            _("About {value} of the atoms are lost at the zero of the field, an order of magnitude: known to ×4."),
            percent,
        ),
        RampCaveatKind.NO_BACKGROUND: (
            _("No background lifetime is given: slow ramps look better than they are. Type one."),
            _PLAIN,
        ),
        RampCaveatKind.THREE_BODY_UNKNOWN: (
            _("The three-body rate constant is not known: dense clouds look better than they are."),
            _PLAIN,
        ),
        RampCaveatKind.THREE_BODY_SCALING: (
            _("K₃ is {value} times what resonant three-body loss at this scattering length can be. Check K₃ and a."),
            times,
        ),
        RampCaveatKind.THREE_BODY_UNITARITY: (
            _("K₃ is {value} times what is possible at the highest temperature: this loss is too fast there."),
            times,
        ),
        RampCaveatKind.LENGTH_RECALLED: (
            _("The scattering length {value} is recalled from its source. Check it before you rely on it."),
            _length,
        ),
        RampCaveatKind.TWO_BODY_RECALLED: (
            _("The two-body rate constant {value} is recalled from its source. Check it before you rely on it."),
            lambda value: format_quantity(value, "cm^3/s", digits=2),
        ),
        RampCaveatKind.THREE_BODY_RECALLED: (
            _("The three-body rate constant {value} is recalled from its source. Check it before you rely on it."),
            lambda value: format_quantity(value, "cm^6/s", digits=2),
        ),
    }
)


def ramp_caveat_text(caveat: RampCaveat) -> str:
    """The sentence of a caveat, with its number."""
    template, say = _CAVEATS[caveat.kind]
    return template.format(value="" if caveat.value is None else say(caveat.value))
