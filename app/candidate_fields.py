"""The keys of candidates and of a passenger, each listed once: loader, saving and forms read these tables."""

from __future__ import annotations

from dataclasses import replace
from types import MappingProxyType

from app.candidate_choices import Basis, Start
from app.choices import PLAN_FIELDS
from app.kinds import DEPTH, FREQUENCY, MAGNETIC_FIELD, SCATTERING_LENGTH
from app.plan_field import Entry, PlanField
from app.ramp_fields import by_name, within

CANDIDATES, CANDIDATE = "candidates", "candidate"
PASSENGER, PASSENGER_SPECIES, PASSENGER_CLOUD = "passenger", "passenger.species", "passenger.cloud"
"""Sections of the file that hold them."""


def _sought(section: str, whose: str) -> tuple[PlanField, ...]:
    """The keys of a field that is to be found."""
    excludes = (f"{section}.field", f"{section}.scattering_length") if section == CANDIDATE else ()
    ends = (("lowest_field", "Field sought from"), ("highest_field", "Field sought to"))
    return (
        *(
            PlanField(
                path=f"{section}.{name}",
                label=label,
                entry=Entry.QUANTITY,
                kind=MAGNETIC_FIELD,
                tip=f"End of the range in which the best field {whose} is sought: where most elastic collisions come "
                "on one loss, three-body loss taken as fast as theory allows, or where the wanted length is.",
                excludes=excludes,
            )
            for name, label in ends
        ),
        PlanField(
            path=f"{section}.wanted_length",
            label="Wanted scattering length",
            entry=Entry.QUANTITY,
            kind=SCATTERING_LENGTH,
            tip="Scattering length for which the field is sought; without it the field of the best ratio of good to "
            "bad collisions.",
            excludes=excludes,
        ),
    )


CANDIDATES_FIELDS = by_name(
    (
        PlanField(
            path="candidates.basis",
            label="Compared at",
            entry=Entry.CHOICE,
            options=tuple(Basis),
            tip="What is the same for all: the trap frequencies, the light, or the start; usually the light where "
            "there are beams or coils.",
        ),
        PlanField(
            path="candidates.start",
            label="Start",
            entry=Entry.CHOICE,
            options=tuple(Start),
            tip="What is alike where all start alike: atoms and temperature, or the phase-space density.",
        ),
        PlanField(
            path="candidates.keys",
            label="Species",
            entry=Entry.KEYS,
            tip="Species that are compared, each in all of its states; none named: all that there are.",
        ),
        *_sought(CANDIDATES, "of every state that a field tunes"),
    )
)

_OWN = (
    "species.key",
    "species.state",
    "cloud.atoms",
    "cloud.temperature",
    "species.field",
    "species.scattering_length",
)

CANDIDATE_FIELDS = MappingProxyType(
    {
        **within(CANDIDATE, (replace(PLAN_FIELDS[path], required=path == "species.key") for path in _OWN)),
        **by_name(_sought(CANDIDATE, "of this state")),
    }
)

PASSENGER_FIELDS = by_name(
    (
        PlanField(
            path="passenger.scattering_length",
            label="Scattering length between the species",
            entry=Entry.QUANTITY,
            kind=SCATTERING_LENGTH,
            tip="s-wave scattering length of an atom of one with an atom of the other; overrides the data.",
        ),
        PlanField(
            path="passenger.frequencies",
            label="Trap frequencies of the passenger",
            entry=Entry.FREQUENCIES,
            kind=FREQUENCY,
            tip="Frequencies of these atoms in the same trap, where it is given by its frequencies; else those of the "
            "first species count. Both clouds then sag by g/ω² along gravity.",
        ),
        PlanField(
            path="passenger.depth",
            label="Trap depth of the passenger",
            entry=Entry.QUANTITY,
            kind=DEPTH,
            tip="Depth of the same trap for these atoms, where it is given by its frequencies; else that of the first "
            "species counts.",
        ),
    )
)

PASSENGER_SPECIES_FIELDS = within(PASSENGER_SPECIES, (f for f in PLAN_FIELDS.values() if f.section == "species"))
PASSENGER_CLOUD_FIELDS = within(PASSENGER_CLOUD, (f for f in PLAN_FIELDS.values() if f.section == "cloud"))
