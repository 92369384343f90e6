"""The plan: its table of fields, plans of flags and forms, changes, parts that check themselves."""

from __future__ import annotations

import dataclasses
from pathlib import Path

import pytest

from app.plan import (
    DEFAULT_PLAN,
    PLAN_FIELDS,
    CloudChoice,
    Entry,
    LossesChoice,
    PlanError,
    SpeciesChoice,
    TargetChoice,
    TrapChoice,
    parse_plan,
    plan_with,
    read_plan,
    with_same_change,
)
from app.units import (
    ATOM_NUMBER,
    DEPTH,
    FREQUENCY,
    SCATTERING_LENGTH,
    Quantity,
    read_quantity,
)

DATA = Path(__file__).parent.parent / "data"
PLAIN = (DATA / "plan_plain.toml").read_text(encoding="utf-8")


# --- the table of fields ---


def test_the_table_names_every_attribute_once() -> None:
    sections = {
        "species": SpeciesChoice,
        "trap": TrapChoice,
        "cloud": CloudChoice,
        "losses": LossesChoice,
        "target": TargetChoice,
    }
    expected = {"title"} | {f"{name}.{f.name}" for name, part in sections.items() for f in dataclasses.fields(part)}
    assert set(PLAN_FIELDS) == expected - {"trap.beams", "trap.coils"}
    flags = [field.flag for field in PLAN_FIELDS.values()]
    assert len(set(flags)) == len(flags)
    for field in PLAN_FIELDS.values():
        assert field.label
        assert field.tip.endswith(".")
        assert (field.kind is not None) == (field.entry in (Entry.QUANTITY, Entry.FREQUENCIES))
        assert set(field.excludes) <= set(PLAN_FIELDS)


# --- flags and forms ---


def test_flags_alone_make_a_plan() -> None:
    plan = plan_with(
        None,
        {
            "cloud.temperature": "200 nK",
            "cloud.atoms": "1e5",
            "trap.frequencies": "120 Hz,120 Hz,20 Hz",
            "species.key": "87Rb",
            "species.spin_components": "2",
        },
    )
    expected = parse_plan(PLAIN.replace('"87Rb"', '"87Rb"\nspin_components = 2'), "a.toml")
    assert plan == expected


@pytest.mark.parametrize(
    ("texts", "sentence"),
    [
        ({"cloud.temperature": "200"}, r"^--temperature: temperature needs a unit"),
        ({"cloud.temperature": ""}, r"^--temperature is missing"),
        ({"species.key": "Rb"}, r'^--species: no species "Rb"'),
        ({"species.state": "F=9"}, r'^--state: 87Rb has no state "F=9"'),
        (
            {"trap.frequencies": "120 Hz"},
            r'^--frequencies: must be three, such as "120 Hz,120 Hz,20 Hz", got 1 of them$',
        ),
        ({"species.spin_components": "two"}, r'^--spin-components: must be a whole number, got "two"$'),
    ],
)
def test_a_bad_flag_is_named(texts: dict[str, str], sentence: str) -> None:
    with pytest.raises(PlanError, match=sentence):
        plan_with(DEFAULT_PLAN, texts)


def test_a_missing_flag_is_named() -> None:
    with pytest.raises(PlanError, match=r"^--frequencies is missing: give the trap frequencies, such as"):
        plan_with(None, {"species.key": "87Rb", "cloud.atoms": "1e5", "cloud.temperature": "1 uK"})
    with pytest.raises(KeyError, match="no\\.field is not a field of a plan"):
        plan_with(DEFAULT_PLAN, {"no.field": "1"})
    with pytest.raises(PlanError, match=r"^line 7: temperature needs a unit"):
        plan_with(DEFAULT_PLAN, {"cloud.temperature": "1"}, where={"cloud.temperature": "line 7"})


def test_an_empty_text_removes_an_optional_entry() -> None:
    deep = plan_with(DEFAULT_PLAN, {"trap.depth": "5 uK"})
    assert deep.trap.depth == read_quantity("5 uK", DEPTH)
    assert plan_with(deep, {"trap.depth": ""}) == DEFAULT_PLAN


def test_a_new_species_drops_what_was_said_of_the_old_one() -> None:
    tuned = plan_with(DEFAULT_PLAN, {"species.scattering_length": "90 a0", "species.spin_components": "1"})
    other = plan_with(tuned, {"species.key": "133Cs"})
    assert other.species == SpeciesChoice(key="133Cs")
    same = plan_with(tuned, {"species.key": "Rb87"})
    assert same.species == tuned.species
    stated = plan_with(tuned, {"species.state": "F=2 mF=2", "species.key": "87Rb"})
    assert stated.species.state is not None
    assert "F=2" in stated.species.state


def test_what_excludes_each_other_replaces_each_other() -> None:
    long = plan_with(DEFAULT_PLAN, {"species.scattering_length": "90 a0"})
    field = plan_with(long, {"species.field": "10 G"})
    assert field.species.scattering_length is None
    assert plan_with(field, {"species.scattering_length": "90 a0"}).species.field is None
    cold = plan_with(DEFAULT_PLAN, {"target.reduced_temperature": "0.5"})
    many = plan_with(cold, {"target.condensate_atoms": "1e4"})
    expected = TargetChoice(condensate_atoms=read_quantity("1e4", ATOM_NUMBER), efficiency=cold.target.efficiency)
    assert many.target == expected
    with pytest.raises(PlanError, match=r"^--field: give either a scattering length or a magnetic field"):
        plan_with(DEFAULT_PLAN, {"species.field": "10 G", "species.scattering_length": "90 a0"})


def test_values_that_flags_leave_alone_are_not_read_again() -> None:
    """A quantity shown in another unit keeps its value, though its text is rounded."""
    kept = Quantity("4.167323825 kHz", 2e-7)
    plan = dataclasses.replace(DEFAULT_PLAN, cloud=dataclasses.replace(DEFAULT_PLAN.cloud, temperature=kept))
    assert plan_with(plan, {"cloud.atoms": "2e5"}).cloud.temperature is kept


def test_a_change_can_be_made_to_another_plan_too() -> None:
    hotter = plan_with(DEFAULT_PLAN, {"cloud.temperature": "1 uK"})
    other = plan_with(DEFAULT_PLAN, {"cloud.atoms": "7e6", "species.key": "6Li", "title": "other"})
    assert with_same_change(other, DEFAULT_PLAN, hotter) == plan_with(other, {"cloud.temperature": "1 uK"})
    assert with_same_change(other, DEFAULT_PLAN, DEFAULT_PLAN) == other
    field = plan_with(DEFAULT_PLAN, {"species.field": "10 G", "title": "field"})
    assert with_same_change(other, DEFAULT_PLAN, field) == plan_with(other, {"species.field": "10 G", "title": "field"})
    with pytest.raises(PlanError, match="give either a scattering length or a magnetic field, not both"):
        with_same_change(plan_with(other, {"species.scattering_length": "9 a0"}), DEFAULT_PLAN, field)


def test_the_same_change_is_made_to_a_plan_with_and_without_a_passenger() -> None:
    whole = read_plan(DATA / "plan_version_1.toml")
    without = dataclasses.replace(whole, passenger=None, ramp=())
    plain = parse_plan(PLAIN, "a.toml")
    came = with_same_change(plain, without, whole)
    assert (came.passenger, came.ramp) == (whole.passenger, whole.ramp)
    gone = with_same_change(came, whole, without)
    assert (gone.passenger, gone.ramp) == (None, ())
    assert whole.passenger is not None
    longer = dataclasses.replace(
        whole,
        passenger=dataclasses.replace(whole.passenger, scattering_length=read_quantity("3 a0", SCATTERING_LENGTH)),
    )
    assert with_same_change(plain, whole, longer).passenger == longer.passenger


# --- the parts check themselves ---


def test_impossible_parts_are_refused() -> None:
    hertz = read_quantity("120 Hz", FREQUENCY)
    with pytest.raises(PlanError, match="frequencies must be three, got 2"):
        TrapChoice(frequencies=(hertz, hertz))  # type: ignore[arg-type]
    with pytest.raises(PlanError, match="spin_components must be from 1 to 20, got 30"):
        SpeciesChoice(spin_components=30)
    with pytest.raises(PlanError, match="title must be one line"):
        dataclasses.replace(DEFAULT_PLAN, title="a\nb")
