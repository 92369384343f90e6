"""The keys of ramps, limits and measured clouds, each listed once: loader, saving and forms read these tables."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace
from types import MappingProxyType

from app.choices import PLAN_FIELDS
from app.control_kinds import CONTROL_KINDS, SPEED_KINDS
from app.kinds import ATOM_NUMBER, CLOUD_WIDTH, DURATION, EXPONENT, TEMPERATURE, TIME, Kind
from app.plan_field import Entry, PlanField
from app.ramp_choices import Handing
from app.trap_choices import BEAM_FIELDS, COILS_FIELDS
from physics.ramp_shapes import Shape
from physics.ramps import Knob

RAMP, STAGES, MOVES, STAGE_TRAP = "ramp", "ramp.stage", "ramp.stage.move", "ramp.stage.trap"
LIMITS, CONTROL_LIMITS, MEASURED = "limits", "limits.control", "measured"
"""Sections of the file that hold them."""


def fields_of_control(fields: Mapping[str, PlanField], knob: Knob) -> Mapping[str, PlanField]:
    """The fields, those whose kind follows from the control with the kind that it has for this one."""
    kinds: dict[str, Kind] = dict.fromkeys(("start", "end", "points", "low", "high"), CONTROL_KINDS[knob])
    kinds["fastest"] = SPEED_KINDS[knob]
    return {
        name: replace(field, kind=kinds[name]) if field.kind is None and name in kinds else field
        for name, field in fields.items()
    }


def by_name(fields: Iterable[PlanField]) -> Mapping[str, PlanField]:
    """Key -> field, in the order of the file."""
    return MappingProxyType({field.name: field for field in fields})


def within(section: str, fields: Iterable[PlanField]) -> Mapping[str, PlanField]:
    """The same keys in another section of the file, by key."""
    found = tuple(fields)
    names = {field.name for field in found}

    def moved(field: PlanField) -> PlanField:
        others = [path.rpartition(".")[2] for path in field.excludes]
        excludes = tuple(f"{section}.{name}" for name in others if name in names)
        return replace(field, path=f"{section}.{field.name}", flag="", excludes=excludes)

    return by_name(moved(field) for field in found)


STAGE_FIELDS = by_name(
    (
        PlanField(path="ramp.stage.label", label="Label", entry=Entry.TEXT, tip="A name of your own for the stage."),
        PlanField(
            path="ramp.stage.duration",
            label="Duration",
            entry=Entry.QUANTITY,
            kind=DURATION,
            tip="How long the stage takes.",
            required=True,
        ),
        PlanField(
            path="ramp.stage.transfer",
            label="Transfer",
            entry=Entry.CHOICE,
            options=tuple(Handing),
            tip="How the cloud comes into the trap of this stage: slowly, so that its entropy is kept, or suddenly.",
        ),
    )
)

MOVE_FIELDS = by_name(
    (
        PlanField(
            path="ramp.stage.move.control",
            label="Control",
            entry=Entry.CHOICE,
            options=tuple(Knob),
            tip="What moves: the depth alone, the whole trap by a scale, or a part of beams and coils.",
            required=True,
        ),
        PlanField(
            path="ramp.stage.move.beam",
            label="Beam",
            entry=Entry.NAME,
            tip="Of a power: the name of the beam.",
        ),
        PlanField(
            path="ramp.stage.move.start",
            label="Start",
            entry=Entry.QUANTITY,
            tip="Where the control begins; by default where it stood. Another value is a sudden jump.",
        ),
        PlanField(path="ramp.stage.move.end", label="End", entry=Entry.QUANTITY, tip="Where the control ends."),
        PlanField(
            path="ramp.stage.move.shape",
            label="Shape",
            entry=Entry.CHOICE,
            options=tuple(Shape),
            tip="Way from start to end: linear, exponential, by a power law a(1 + t/τ)^−exponent, or by a table.",
        ),
        PlanField(
            path="ramp.stage.move.tau",
            label="Time constant τ",
            entry=Entry.QUANTITY,
            kind=DURATION,
            tip="Of a power law; it takes the place of the end.",
        ),
        PlanField(
            path="ramp.stage.move.exponent",
            label="Exponent",
            entry=Entry.QUANTITY,
            kind=EXPONENT,
            tip="Of a power law.",
        ),
        PlanField(
            path="ramp.stage.move.points",
            label="Points",
            entry=Entry.POINTS,
            tip="Of a table: times from 0 s to the duration, each with a value, straight lines between them.",
        ),
    )
)

DIRECT_MOVE_FIELDS = within(STAGES, MOVE_FIELDS.values())
"""The keys of a move that stands on its stage."""

STAGE_TRAP_FIELDS = within(STAGE_TRAP, (field for field in PLAN_FIELDS.values() if field.section == "trap"))
"""The keys of the trap that a stage hands the cloud to."""

STAGE_BEAM_FIELDS = within(f"{STAGE_TRAP}.beam", BEAM_FIELDS.values())
STAGE_COILS_FIELDS = within(f"{STAGE_TRAP}.coils", COILS_FIELDS.values())

LIMITS_FIELDS = by_name(
    (
        PlanField(
            path="limits.time",
            label="Longest time",
            entry=Entry.QUANTITY,
            kind=DURATION,
            tip="What a designed ramp may take in all.",
        ),
    )
)

CONTROL_LIMITS_FIELDS = by_name(
    (
        *within(CONTROL_LIMITS, (MOVE_FIELDS["control"], MOVE_FIELDS["beam"])).values(),
        PlanField(path="limits.control.low", label="Lowest", entry=Entry.QUANTITY, tip="Lowest value of the control."),
        PlanField(
            path="limits.control.high", label="Highest", entry=Entry.QUANTITY, tip="Highest value of the control."
        ),
        PlanField(
            path="limits.control.fastest",
            label="Fastest",
            entry=Entry.QUANTITY,
            tip="Largest change per time that the control can do.",
        ),
    )
)

MEASURED_FIELDS = by_name(
    (
        PlanField(
            path="measured.label",
            label="Label",
            entry=Entry.TEXT,
            tip="A name of your own for the measured cloud.",
            required=True,
        ),
        PlanField(
            path="measured.stage",
            label="After stage",
            entry=Entry.WHOLE,
            tip="The stage, counted from 1, at whose end the cloud was measured.",
        ),
        PlanField(
            path="measured.time",
            label="Time",
            entry=Entry.QUANTITY,
            kind=TIME,
            tip="Time of the ramp at which the cloud was measured.",
        ),
        PlanField(
            path="measured.atoms",
            label="Atoms",
            entry=Entry.QUANTITY,
            kind=ATOM_NUMBER,
            tip="Atom number per spin state.",
            required=True,
        ),
        PlanField(
            path="measured.temperature",
            label="Temperature",
            entry=Entry.QUANTITY,
            kind=TEMPERATURE,
            tip="Temperature of the cloud; or give widths and an expansion time.",
        ),
        PlanField(
            path="measured.widths",
            label="Widths",
            entry=Entry.WIDTHS,
            kind=CLOUD_WIDTH,
            tip="rms widths along x, y and z after the expansion: one, two or three of them.",
        ),
        PlanField(
            path="measured.expansion_time",
            label="Expansion time",
            entry=Entry.QUANTITY,
            kind=TIME,
            tip="Time of free expansion before the picture.",
        ),
        PlanField(
            path="measured.passenger_atoms",
            label="Atoms of the passenger",
            entry=Entry.QUANTITY,
            kind=ATOM_NUMBER,
            tip="Atom number of the second species, per spin state, at the same time; empty: as simulated.",
        ),
        PlanField(
            path="measured.passenger_temperature",
            label="Temperature of the passenger",
            entry=Entry.QUANTITY,
            kind=TEMPERATURE,
            tip="Temperature of the second species at the same time; empty: as simulated.",
        ),
    )
)
