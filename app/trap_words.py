"""What is said of a trap: why it holds nothing, why a number is missing, what to mind, and the cautions."""

from __future__ import annotations

import math
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.language import translate as _
from app.units import best_unit, format_quantity
from app.words import number, percent, temperature
from physics.constants import boltzmann
from physics.light import NoPolarizability
from physics.traps.boundary import Exit
from physics.traps.notes import Note, NoteKind
from physics.traps.potential import NotTrapped
from physics.traps.survey import NoFrequencies

if TYPE_CHECKING:
    from app.answers.trap import TrapAnswer
    from app.plan import TrapChoice
    from physics.checks import Floats

CAUTIOUS_POWER = 0.5
"""[W] Power of a beam from which the caution about light is shown."""

_REASONS = MappingProxyType(
    {
        NotTrapped.NOTHING_ON: _("no beam is on, and no coils make a field that changes in space"),
        NotTrapped.NO_POLARIZABILITY: _("what beam {beam} does to {species} is not known, as {light}"),
        NotTrapped.NO_MOMENT: _("the magnetic moment of {state} is not known, or its spin states have different ones"),
        NotTrapped.NOT_MAGNETIC: _("{state} has no magnetic moment that coils could hold"),
        NotTrapped.HIGH_FIELD_SEEKER: _("{state} is drawn to high fields, and coils have no maximum of the field"),
        NotTrapped.BLUE_LIGHT: _("every beam is tuned above the lines of {species} and pushes the atoms out"),
        NotTrapped.FIELD_OPENS: _("the bias is too high for the gradient, so that the field falls away from the axis"),
        NotTrapped.GRAVITY: _("gravity pulls the atoms out; give more power or a steeper field, or levitate them"),
        NotTrapped.LEVITATION: _("the levitation gradient is so steep that it pulls the atoms out"),
        NotTrapped.KNIFE: _("the radio-frequency knife is set so low that it takes away every atom"),
        NotTrapped.NO_MINIMUM: _("the potential has no minimum"),
    }
)
_LIGHT = MappingProxyType(
    {
        NoPolarizability.NOT_IN_DATA: _("the data have neither its lines nor a polarizability"),
        NoPolarizability.FAR_FROM_PUBLISHED: _("{wavelength} is too far from the only published polarizability"),
        NoPolarizability.ON_RESONANCE: _("{wavelength} is within a few linewidths of a line"),
    }
)
_NO_FREQUENCIES = MappingProxyType(
    {
        NoFrequencies.CUSP: _("the field vanishes at the minimum, where the potential has a cusp, not a parabola"),
        NoFrequencies.FLAT: _("the potential does not rise in every direction from the minimum"),
    }
)
_WAYS_OUT = MappingProxyType(
    {
        Exit.PASS: _("over a pass of the potential"),
        Exit.KNIFE: _("at the radio-frequency knife"),
        Exit.WALL: _("at the wall"),
        Exit.ARM_END: _("at the end of a beam's arm"),
        Exit.OPEN_SPACE: _("into free space, on every side"),
    }
)
_NOTES = MappingProxyType(
    {
        NoteKind.BLUE_LIGHT: _("Beam {beam} is tuned above the nearest line and pushes the atoms away from its light."),
        NoteKind.NEAR_RESONANCE: _(
            "Beam {beam} is only {share} from a line: polarisation and hyperfine structure, left out, count there."
        ),
        NoteKind.PUBLISHED_POLARIZABILITY: _(
            "For beam {beam} the polarizability is one published for a wavelength {share} away. A measured frequency "
            "can calibrate the beam."
        ),
        NoteKind.TIGHT_FOCUS: _(
            "Beam {beam} is focused to {number} wavelengths, so tightly that its light is not quite that of a Gaussian "
            "beam."
        ),
        NoteKind.INFINITE_ARMS: _("The volume curve ends at {share} of the depth: above, the volume has no end."),
        NoteKind.WALL: _("Nothing but the walls, taken {length} away, limits this trap: its depth is a guess."),
        NoteKind.ARM_END: _("The way out is the end of a beam's arm, as far as it is followed."),
        NoteKind.FIELD_ZERO: _("The field vanishes at the minimum: cold atoms lose their state there."),
        NoteKind.LINEAR_ZEEMAN: _(
            "Fields reach {frequency} in µB·B/h, and the Zeeman effect is taken as linear: good while that is a few "
            "percent of the hyperfine splitting at most."
        ),
        NoteKind.KNIFE_IDLE: _("The radio-frequency knife at {frequency} does nothing to this state."),
    }
)


def reason_not_trapped(answer: TrapAnswer) -> str:
    """Why nothing is held, as a clause without a full stop; empty where atoms are held."""
    found = answer.survey
    if found.reason is None:
        return ""
    light = found.light
    why = (
        ""
        if light is None or light.reason is None
        else _LIGHT[light.reason].format(wavelength=_length(light.wavelength))
    )
    return _REASONS[found.reason].format(
        beam=found.beam, species=answer.state.key, state=f"{answer.state.key} {answer.state.name}", light=why
    )


def reason_no_frequencies(answer: TrapAnswer) -> str:
    """Why a trap that holds atoms has no frequencies, as a clause; empty where it has."""
    missing = answer.survey.no_frequencies
    return "" if missing is None else _NO_FREQUENCIES[missing]


def reasons_missing(answer: TrapAnswer) -> dict[str, str]:
    """Name of each number that the answer does not have -> why, as a clause."""
    found = answer.survey
    if not answer.trapped:
        return dict.fromkeys(NUMBERS, _("not trapped"))
    reasons: dict[str, str] = {}
    if found.frequencies is None:
        reasons |= dict.fromkeys(("frequencies", "axes"), reason_no_frequencies(answer))
    if found.depth is None:
        reasons |= dict.fromkeys(("depth", "depth_temperature", "volume_curve"), _("the depth is not given"))
    if answer.trap.harmonic:
        given = _("the trap is given by its frequencies")
        reasons |= dict.fromkeys(("sag", "scattering_rate", "heating_rate", "escape", "arm_depth"), given)
        return reasons
    if found.sag is None:
        off = answer.trap.gravity_direction is None
        reasons["sag"] = _("gravity is off") if off else _("without gravity nothing would be held there")
    if not math.isfinite(found.heating.scattering_rate):
        unknown = _("how the atoms scatter light of this wavelength is not known")
        reasons |= dict.fromkeys(("scattering_rate", "heating_rate"), unknown)
    if found.escape is None or found.escape.direction is None:
        reasons["escape"] = _("the way out is not in one direction")
    if found.arm_depth is None:
        reasons["arm_depth"] = _("no arm of a beam opens below the depth")
    return reasons


NUMBERS = (
    "frequencies",
    "axes",
    "minimum",
    "sag",
    "depth",
    "depth_temperature",
    "arm_depth",
    "scattering_rate",
    "heating_rate",
    "volume_curve",
    "escape",
)
"""Names of the numbers of a trap, in the order of its JSON object."""


def heading(answer: TrapAnswer) -> str:
    """What the answer is about: species, state, what the trap is made of."""
    made = answer.trap.makers if not answer.trap.harmonic else _("given frequencies")
    return _("{species}, {state}; trap of {made}").format(species=answer.state.key, state=answer.state.name, made=made)


def trap_rows(answer: TrapAnswer) -> list[tuple[str, str]]:
    """Name and value of the numbers of a trap that holds atoms; a clause where one is missing."""
    found, missing = answer.survey, reasons_missing(answer)
    direction = None if found.escape is None else found.escape.direction
    leaves = way_out(answer) + ("" if direction is None else _along(direction))
    rows = [
        ("frequencies", _("frequencies"), frequencies_text(answer)),
        ("depth", _("depth"), depth_text(answer)),
        ("arm_depth", _("depth to an arm"), _kelvin(found.arm_depth)),
        ("escape", _("atoms leave"), leaves),
        ("minimum", _("minimum at"), _place(found.minimum)),
        ("sag", _("sag"), sag_text(answer)),
        ("scattering_rate", _("photons scattered"), f"{number(found.heating.scattering_rate)} 1/s"),
        ("heating_rate", _("heating by them"), f"{number(1e9 * found.heating.heating_rate)} nK/s"),
    ]
    gone = {"arm_depth"} if "arm_depth" in missing else set()
    if not leaves or answer.trap.harmonic:
        gone |= {"escape", "scattering_rate", "heating_rate", "minimum"}
    return [
        (label, text if name not in missing or name == "escape" else f"– ({missing[name]})")
        for name, label, text in rows
        if name not in gone
    ]


def mode_rows(answer: TrapAnswer) -> list[tuple[str, str]]:
    """Each frequency with the direction of its axis; none where there are no frequencies, or they are given."""
    found = answer.survey
    if found.frequencies is None or answer.trap.harmonic:
        return []
    return [
        (_("{frequency} Hz").format(frequency=number(float(f), 4)), _along(axis).strip())
        for f, axis in zip(found.frequencies, found.axes, strict=True)
    ]


def frequencies_text(answer: TrapAnswer, digits: int = 4) -> str:
    """The three frequencies; "–" without."""
    frequencies = answer.survey.frequencies
    return "–" if frequencies is None else " × ".join(number(float(f), digits) for f in frequencies) + " Hz"


def depth_text(answer: TrapAnswer) -> str:
    """The depth as a temperature; "–" where it is not known."""
    return _kelvin(answer.survey.depth)


def sag_text(answer: TrapAnswer) -> str:
    """The sag; "–" where it is not known."""
    sag = answer.survey.sag
    return "–" if sag is None else _small_length(sag)


def _kelvin(energy: float | None) -> str:
    return "–" if energy is None else temperature(energy / boltzmann)


def _small_length(value: float) -> str:
    """A length that comes out of a search: what is below a picometre is none."""
    if abs(value) < 1e-12:
        return "0 µm"
    return format_quantity(value, best_unit(abs(value), ("nm", "µm", "mm")), digits=3).replace("-", "−")


def _place(point: Floats) -> str:
    texts = (number(1e6 * round(float(part), 12), 4).replace("-", "−") for part in point)
    return f"({', '.join(texts)}) µm"


def _along(direction: Floats) -> str:
    texts = (f"{float(part) + 0.0:.3f}".replace("-0.000", "0.000").replace("-", "−") for part in direction)
    return _(" along ({direction})").format(direction=", ".join(texts))


def way_out(answer: TrapAnswer) -> str:
    """Over what atoms leave, in a few words; empty where that is not known."""
    escape = answer.survey.escape
    return "" if escape is None else _WAYS_OUT[escape.kind]


_SAME = 1e-3
"""Relative distance of two wavelengths below which they are one."""


def note_text(note: Note) -> str:
    """A note on the trap, with its number, as a sentence."""
    value = abs(note.value)
    if note.kind is NoteKind.PUBLISHED_POLARIZABILITY and value < _SAME:
        return _("For beam {beam} the polarizability is the one published for this wavelength.").format(beam=note.beam)
    lengths = {NoteKind.WALL: _length}
    frequencies = (NoteKind.LINEAR_ZEEMAN, NoteKind.KNIFE_IDLE)
    return _NOTES[note.kind].format(
        beam=note.beam,
        share=percent(value),
        number=number(value, 2),
        length=lengths.get(note.kind, number)(value),
        frequency=_frequency(value) if note.kind in frequencies else "",
    )


LIGHT_CAUTION = _(
    "Beams from 0.5 W are typically class 4 and, beyond 700 nm, invisible: follow IEC 60825-1 or ANSI Z136.1, local "
    "rules and your laser safety officer."
)
COILS_CAUTION = _(
    "Coils carry high currents, get hot and store energy, and their stray field reaches far (0.5 mT is the line for "
    "active implants): use interlocks, and follow local electrical codes."
)
ESTIMATES = _("These are planning estimates: your own measurement and licensed practice decide.")


def named_cautions(trap: TrapChoice) -> dict[str, str]:
    """What to mind about the light and the coils that a trap is made of, and what all these numbers are: sentences by
    id; none where there is nothing to mind."""
    light = any(beam.power.value >= CAUTIOUS_POWER for beam in trap.beams)
    found = {"laser_light": LIGHT_CAUTION} if light else {}
    found |= {"coils": COILS_CAUTION} if trap.coils is not None else {}
    return found | ({"estimates": ESTIMATES} if found else {})


def cautions(trap: TrapChoice) -> tuple[str, ...]:
    """The sentences of `named_cautions`."""
    return tuple(named_cautions(trap).values())


def caution_title(trap: TrapChoice) -> str:
    """What the cautions are about, in a few words; empty where there are none."""
    about = [_ABOUT[name] for name in named_cautions(trap) if name in _ABOUT]
    return _("Mind: {what}").format(what=_(" and ").join(about)) if about else ""


_ABOUT = MappingProxyType({"laser_light": _("laser light"), "coils": _("coils")})


def fact_texts(answer: TrapAnswer) -> dict[str, str]:
    """Name -> text of the numbers that decide about a trap; "–" where one is not known, and none that means nothing."""
    if not answer.trapped:
        return {"frequencies": _("not trapped"), "depth": "–", "sag": "–"}
    found, missing = answer.survey, reasons_missing(answer)
    texts = {
        "frequencies": frequencies_text(answer),
        "depth": depth_text(answer),
        "arm_depth": _kelvin(found.arm_depth),
        "sag": sag_text(answer),
    }
    if found.heating.scattering_rates:
        texts |= {
            "scattering_rate": f"{number(found.heating.scattering_rate)} 1/s",
            "heating_rate": f"{number(1e9 * found.heating.heating_rate)} nK/s",
        }
    # An arm that does not open, and light of unknown effect, are left out; the rest says "–".
    gone = {name for name in texts if name in missing and name not in ("frequencies", "depth", "sag")}
    return {name: text for name, text in texts.items() if name not in gone}


def _length(value: float) -> str:
    return format_quantity(value, best_unit(value, ("nm", "µm", "mm")), digits=4)


def _frequency(value: float) -> str:
    return format_quantity(value, best_unit(value, ("kHz", "MHz")), digits=2)
