"""The plan and its file: strict reading, careful saving, errors in one sentence."""

from __future__ import annotations

import dataclasses
import os
import stat
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import app.plan_saving
from app.plan import (
    DEFAULT_PLAN,
    FORMAT,
    PLAN_FIELDS,
    CloudChoice,
    Entry,
    LossesChoice,
    Plan,
    PlanError,
    SpeciesChoice,
    TargetChoice,
    TrapChoice,
    parse_plan,
    plan_with,
    read_plan,
    save_plan,
    with_same_change,
    write_plan,
)
from app.plan_file import entries_of
from app.units import (
    ATOM_NUMBER,
    DEPTH,
    EFFICIENCY,
    FREQUENCY,
    INTENSITY_NOISE,
    LIFETIME,
    REDUCED_TEMPERATURE,
    SCATTERING_LENGTH,
    TEMPERATURE,
    THREE_BODY_RATE,
    Quantity,
    read_quantity,
)
from physics.cloud import AVAILABLE_MODELS, Model

DATA = Path(__file__).parent.parent / "data"

PLAIN = """\
coldward = 1
[species]
key = "87Rb"
[trap]
frequencies = ["120 Hz", "120 Hz", "20 Hz"]
[cloud]
atoms = "1e5"
temperature = "200 nK"
"""


def changed(old: str, new: str) -> str:
    assert old in PLAIN
    return PLAIN.replace(old, new)


# --- reading ---------------------------------------------------------------------------------------------------------


def test_a_file_of_format_1_is_read_with_all_its_sections() -> None:
    plan = read_plan(DATA / "plan_version_1.toml")
    assert plan.title == "Crossed dipole trap, last two seconds"
    assert plan.species == SpeciesChoice(
        key="87Rb",
        state="F=1 mF=-1",
        spin_components=1,
        scattering_length=read_quantity("100.4 a0", SCATTERING_LENGTH),
    )
    assert [f.value for f in plan.trap.frequencies] == [120.0, 120.0, 20.0]
    assert [f.sigma for f in plan.trap.frequencies] == [2.0, None, 0.5]
    assert plan.trap.depth == read_quantity("5 uK", DEPTH)
    assert plan.cloud == CloudChoice(
        atoms=Quantity("1.0(1)e5", 1e5, 1e4), temperature=Quantity("200(10) nK", 2e-7, 1e-8), model=Model.SEMI_IDEAL
    )
    assert plan.target.reduced_temperature == read_quantity("0.5", REDUCED_TEMPERATURE)
    assert plan.target.efficiency == read_quantity("2.5", EFFICIENCY)
    assert plan.losses == LossesChoice(
        background_lifetime=read_quantity("60 s", LIFETIME),
        three_body=read_quantity("4e-29 cm^6/s", THREE_BODY_RATE),
        intensity_noise=read_quantity("1e-12 1/Hz", INTENSITY_NOISE),
    )
    assert plan.losses.three_body is not None
    assert plan.losses.three_body.value == pytest.approx(4e-41, rel=1e-14)
    assert plan.unused == ("trap.beam", "trap.coils")


def test_a_plan_is_hashable_and_equal_by_content() -> None:
    with_comment = parse_plan("# mine\n" + PLAIN, "a.toml")
    assert with_comment == parse_plan(PLAIN, "b.toml")
    assert hash(with_comment) == hash(parse_plan(PLAIN, "b.toml"))
    hotter = dataclasses.replace(
        with_comment, cloud=dataclasses.replace(with_comment.cloud, temperature=read_quantity("1 µK", TEMPERATURE))
    )
    assert hotter != with_comment


def test_the_default_plan_says_what_its_texts_say() -> None:
    """Its values are written beside the texts, so that starting reads nothing."""
    assert parse_plan(write_plan(DEFAULT_PLAN), "default.toml") == DEFAULT_PLAN


def test_numbers_without_unit_may_stand_bare() -> None:
    plan = parse_plan(changed('"1e5"', "1.0e5") + "[target]\ncondensate_atoms = 20_000\nefficiency = 2.5", "a.toml")
    assert plan.cloud.atoms == Quantity("1.0e5", 1e5)
    assert plan.target.condensate_atoms == Quantity("20000", 2e4)


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ("coldward = ?", r"^a\.toml is not a readable TOML file: .*line 1"),
        ("", r'^a\.toml is not a plan file: it must say "coldward = 1", it is missing$'),
        (changed("coldward = 1", 'coldward = "1"'), r'it must say "coldward = 1", got "1"$'),
        (changed("coldward = 1", "coldward = true"), r'it must say "coldward = 1", got true$'),
        (
            changed("coldward = 1", "coldward = 2\nnovelty = 3"),
            r"^a\.toml is a plan of format 2, and this version of Coldward reads format 1: open it with a newer",
        ),
        (
            changed("temperature", "temprature"),
            r"^a\.toml: cloud\.temprature is not a key of a plan: the nearest is cloud\.temperature; "
            r"allowed in \[cloud\] are atoms, temperature, model$",
        ),
        (
            PLAIN + "[los]\n",
            r"los is not a key of a plan: the nearest is losses; allowed at the top are coldward, title",
        ),
        (PLAIN + "[losses]\nfourbody = 1\n", r"losses\.fourbody is not a key .* nearest is losses\.two_body"),
        (
            PLAIN + '[[ramp.stage]]\nduraton = "1 s"\n',
            r"ramp\.stage\.duraton is not .* nearest is ramp\.stage\.duration",
        ),
        (PLAIN + '"a.b" = 1\n', r"cloud\.a\.b is not a key of a plan"),
        (
            PLAIN + '[losses]\nthree_body = "4e-29"\n',
            r'losses\.three_body: three-body rate constant needs a unit: type for instance "4e-29 cm\^6/s"',
        ),
        (
            PLAIN + '[losses]\ntwo_body = "1e-14 cm^6/s"\n',
            r'losses\.two_body: "cm\^6/s" is not a unit of two-body rate constant: cm\^3/s, m\^3/s are read',
        ),
        (
            PLAIN + '[losses]\nheating = "-1 nK/s"\n',
            r'losses\.heating: heating rate must be from 0 nK/s to 10 K/s, got "-1 nK/s"',
        ),
        (
            PLAIN + "[losses]\nbackground_lifetime = 60\n",
            r'losses\.background_lifetime: needs a unit: write a text in quotes, such as "60 s", not 60$',
        ),
        (changed('"200 nK"', '"200"'), r'^a\.toml: cloud\.temperature: temperature needs a unit: .* not "200"$'),
        (
            changed('"200 nK"', "200"),
            r'cloud\.temperature: needs a unit: write a text in quotes, such as "200 nK", not 200',
        ),
        (changed('"200 nK"', "2e-7"), r"needs a unit: write a text in quotes, such as \"200 nK\", not 2e-7$"),
        (changed('"200 nK"', '"200 G"'), r'cloud\.temperature: "G" is not a unit of temperature: nK, µK'),
        (changed('"200 nK"', '"-1 nK"'), r'cloud\.temperature: temperature must be from 1 pK to 10 K, got "-1 nK"$'),
        (changed('"200 nK"', '"1,5 nK"'), r'the comma in "1,5" is not read'),
        (changed('"200 nK"', "{ a = 1 }"), r"cloud\.temperature: must be a text in quotes, .* got a table$"),
        (changed('"1e5"', "true"), r"cloud\.atoms: must be a text in quotes, such as \"1.0e5\", got true$"),
        (changed('"1e5"', "nan"), r'cloud\.atoms: atom number: "nan" does not begin with a number$'),
        (changed('atoms = "1e5"\n', ""), r'cloud\.atoms is missing: give the atoms, such as "1\.0e5"$'),
        (changed('key = "87Rb"', 'state = "F=1 mF=-1"'), r'species\.key is missing: give the species, such as "87Rb"$'),
        (changed('"87Rb"', '"88Rb"'), r'^a\.toml: species\.key: no species "88Rb" in the data; the nearest are 8.Rb'),
        (changed('"87Rb"', "87"), r"species\.key: must be a text in quotes, got 87$"),
        (
            changed('"87Rb"', '"87Rb"\nstate = "F=3 mF=3"'),
            r'species\.state: 87Rb has no state "F=3 mF=3"; its states are "F=',
        ),
        (
            changed('"87Rb"', '"87Rb"\nspin_components = 1.5'),
            r"species\.spin_components: must be a whole number, got 1\.5$",
        ),
        (changed('"87Rb"', '"87Rb"\nspin_components = 0'), r"spin_components must be from 1 to 20, got 0$"),
        (
            changed('"87Rb"', '"87Rb"\nscattering_length = "1 a0"\nfield = "1 G"'),
            r"^a\.toml: species\.field: give either a scattering length or a magnetic field, not both$",
        ),
        (changed(', "20 Hz"]', "]"), r"trap\.frequencies: must be three, such as \[.*\], got 2 of them$"),
        (changed('["120 Hz", "120 Hz", "20 Hz"]', "120"), r"trap\.frequencies: must be three, .* got 120$"),
        (changed('"20 Hz"]', "20]"), r"trap\.frequencies: needs a unit"),
        (changed('"20 Hz"]', '"20 rad/s"]'), r"trap\.frequencies: angular frequencies are not read: divide by 2π"),
        (
            changed('frequencies = ["120 Hz", "120 Hz", "20 Hz"]', ""),
            r'^a\.toml: trap\.frequencies is missing: give the trap frequencies, such as "120 Hz", or make the trap of',
        ),
        (PLAIN + 'model = "semi"\n', r'cloud\.model: "semi" is not a model: "ideal", .* the nearest is "semi-ideal"$'),
        (
            PLAIN + "[target]\nreduced_temperature = 0.5\ncondensate_atoms = 1e4\n",
            r"target\.condensate_atoms: a target is one of .* got reduced_temperature and condensate_atoms$",
        ),
        ('title = """a\nb"""\n' + PLAIN, r"title: title must be one line of at most 200 characters$"),
        (
            "coldward = " + 5000 * "9",
            r"^a\.toml is not a plan file: it holds a number beyond every one that can be read$",
        ),
        ("coldward = " + 90 * "9", r"^a\.toml is a plan of format 9{79}…, and this version of Coldward reads format 1"),
        (PLAIN + "x = " + 3000 * "[" + 3000 * "]", r"^a\.toml is not a plan file: its lists or tables are nested too"),
        (PLAIN + "title" + 3000 * ".a" + " = 1", r"cloud\.title is not a key of a plan: the nearest is cloud"),
        ("title" + 3000 * ".a" + " = 1\n" + PLAIN, r"^a\.toml: title: must be a text in quotes, got a table$"),
        ('"a\\u0000\\nb" = 1\n' + PLAIN, r"^a\.toml: a\\x00\\nb is not a key of a plan"),
        (changed('"87Rb"', '"87\\u202eRb"'), r'species\.key: must be one line of .* got "87\\u202eRb"$'),
        (
            changed('"87Rb"', f'"{300 * "8"}"'),
            r'species\.key: must be one line of at most 80 characters, got "8{79}…"$',
        ),
        (
            changed('"87Rb"', '"87Rb"\nspin_components = ' + 90 * "1"),
            r"spin_components: must be a whole number, got 1+…$",
        ),
        ('title = "x"\nspecies = 1\n' + "coldward = 1", r"^a\.toml: species must be a section \[species\], got 1$"),
    ],
)
def test_what_is_wrong_is_said_in_one_sentence(text: str, sentence: str) -> None:
    with pytest.raises(PlanError, match=sentence) as caught:
        parse_plan(text, "a.toml")
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize("model", AVAILABLE_MODELS)
def test_every_model_is_read_however_it_is_spelt(model: Model) -> None:
    for text in (model.value, model.value.upper(), model.value.replace("-", " ")):
        assert parse_plan(f'{PLAIN}model = "{text}"\n', "a.toml").cloud.model is model


def test_files_that_are_none(tmp_path: Path) -> None:
    with pytest.raises(PlanError, match=r"there is no such file$"):
        read_plan(tmp_path / "none.toml")
    with pytest.raises(PlanError, match="could not be read"):
        read_plan(tmp_path)
    (tmp_path / "binary.toml").write_bytes(b"\xff\xfe\x00")
    with pytest.raises(PlanError, match=r"is not a plan file: it is not text in UTF-8$"):
        read_plan(tmp_path / "binary.toml")


def test_reading_a_usual_plan_loads_neither_pint_nor_tomlkit() -> None:
    program = (
        "import sys\nfrom app.plan import *\n"
        f"parse_plan({PLAIN!r}, 'a')\n"
        "print([m for m in ('pint', 'tomlkit', 'PySide6', 'scipy') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


# --- the table of fields ---------------------------------------------------------------------------------------------


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


# --- flags and forms -------------------------------------------------------------------------------------------------


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
    expected = parse_plan(changed('"87Rb"', '"87Rb"\nspin_components = 2'), "a.toml")
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


# --- saving ----------------------------------------------------------------------------------------------------------


def test_a_plan_that_did_not_change_is_written_byte_for_byte() -> None:
    text = (DATA / "plan_version_1.toml").read_text(encoding="utf-8")
    assert write_plan(parse_plan(text, "a.toml")) == text
    assert write_plan(DEFAULT_PLAN, text) != text
    crlf = PLAIN.replace("\n", "\r\n")
    assert write_plan(parse_plan(crlf, "a.toml")) == crlf


def test_saving_changes_only_the_lines_that_changed() -> None:
    text = (DATA / "plan_version_1.toml").read_text(encoding="utf-8")
    plan = plan_with(
        parse_plan(text, "a.toml"),
        {
            "cloud.atoms": "2e5",
            "trap.frequencies": "120(2) Hz,2π×120 Hz,25 Hz",
            "species.state": "F=2 mF=2",
            "trap.depth": "",
            "target.condensate_atoms": "1e4",
        },
    )
    written = write_plan(plan)
    before, after = text.splitlines(), written.splitlines()
    assert [line for line in before if line not in after] == [
        'state = "f=1 mf=-1"                   # case and spaces do not matter',
        'frequencies = ["120(2) Hz", "2π×120 Hz", "20.0(5) Hz"]   # ordinary frequencies',
        'depth = "5 uK"',
        'atoms = "1.0(1)e5"                    # per spin state',
        "reduced_temperature = 0.5",
    ]
    assert [line for line in after if line not in before] == [
        f'state = "{plan.species.state}"                   # case and spaces do not matter',
        'frequencies = ["120(2) Hz", "2π×120 Hz", "25 Hz"]   # ordinary frequencies',
        'atoms = "2e5"                    # per spin state',
        "condensate_atoms = 1e4",
    ]
    assert parse_plan(written, "b.toml") == plan


def test_comments_within_a_list_and_odd_layouts_are_kept() -> None:
    text = (
        "coldward=1\ncloud.atoms = '1e5' # single quotes\ncloud.temperature='200 nK'\nspecies={key='Rb87'}\n"
        "trap.frequencies = [\n  '120 Hz', # x\n  '120 Hz', # y\n  '20 Hz' # z\n]\n"
    )
    plan = plan_with(
        parse_plan(text, "a.toml"), {"trap.frequencies": "120 Hz,120 Hz,30 Hz", "species.state": "F=2 mF=2"}
    )
    written = write_plan(plan)
    assert "'120 Hz', # y\n" in written
    assert "# z" in written
    assert "cloud.atoms = '1e5' # single quotes\n" in written
    assert "Rb87" in written
    assert parse_plan(written, "b.toml") == plan


def test_a_copied_plan_takes_the_unused_sections_along() -> None:
    plan = plan_with(read_plan(DATA / "plan_version_1.toml"), {"cloud.atoms": "2e5"})
    again = parse_plan(write_plan(plan), "copy.toml")
    assert again == plan
    assert 'keys = ["87Rb", "41K", "133Cs"]' in again.source


def test_losses_are_saved_and_taken_back() -> None:
    plan = plan_with(
        parse_plan(PLAIN, "a.toml"), {"losses.background_lifetime": "60(5) s", "losses.heating": "20 nK/s"}
    )
    written = write_plan(plan)
    assert '[losses]\nbackground_lifetime = "60(5) s"\nheating = "20 nK/s"' in written
    assert parse_plan(written, "b.toml") == plan
    without = plan_with(plan, {"losses.background_lifetime": "", "losses.heating": ""})
    assert without.losses == LossesChoice()
    assert parse_plan(write_plan(without), "c.toml") == without


def test_another_species_drops_what_was_said_of_losses_by_collisions() -> None:
    texts = {
        "losses.background_lifetime": "60 s",
        "losses.two_body": "1e-14 cm^3/s",
        "losses.three_body": "1e-28 cm^6/s",
    }
    plan = plan_with(plan_with(parse_plan(PLAIN, "a.toml"), texts), {"species.key": "23Na"})
    assert plan.losses.background_lifetime is not None
    assert plan.losses.two_body is None
    assert plan.losses.three_body is None


APART = """\
coldward = 1
[trap]
frequencies = ["120 Hz", "120 Hz", "20 Hz"]
depth = "5 uK"
[species]
key = "87Rb"
[trap.coils]  # a part of the trap that stands apart
bias = "1.5 G"
[cloud]
atoms = "1e5"
temperature = "200 nK"
"""


@pytest.mark.parametrize(("path", "text"), [("trap.depth", ""), ("trap.depth", "6 µK"), ("losses.heating", "1 nK/s")])
def test_a_section_in_two_places_can_be_changed(path: str, text: str) -> None:
    after = plan_with(parse_plan(APART, "a.toml"), {path: text})
    written = write_plan(after)
    assert parse_plan(written, "b.toml") == after
    assert "# a part of the trap that stands apart" in written


def test_a_file_without_the_section_gets_it() -> None:
    plan = plan_with(parse_plan(PLAIN, "a.toml"), {"target.efficiency": "2.5", "title": "Mine"})
    written = write_plan(plan)
    assert parse_plan(written, "b.toml") == plan
    assert "efficiency = 2.5" in written


def number_texts(low: int, high: int) -> st.SearchStrategy[str]:
    body = st.integers(low, high).map(str)
    return st.one_of(body, st.tuples(body, st.integers(1, 9)).map(lambda pair: f"{pair[0]}({pair[1]})"))


@st.composite
def plans(draw: st.DrawFn) -> Plan:
    def optional(texts: st.SearchStrategy[str]) -> str:
        return draw(st.one_of(st.just(""), texts))

    frequency = st.tuples(number_texts(1, 9999), st.sampled_from(["Hz", "kHz"])).map(" ".join)
    collisions = draw(st.sampled_from(["", "species.scattering_length", "species.field"]))
    target = draw(
        st.sampled_from(
            ["", "target.reduced_temperature", "target.condensate_atoms", "target.peak_phase_space_density"]
        )
    )
    printable = st.characters(codec="utf-8").filter(str.isprintable)
    texts = {
        "title": draw(st.text(printable, max_size=20)),
        "species.key": draw(st.sampled_from(["87Rb", "41K", "6Li", "4He_metastable"])),
        "species.spin_components": optional(st.sampled_from(["1", "2"])),
        "trap.frequencies": ",".join(draw(st.lists(frequency, min_size=3, max_size=3))),
        "trap.depth": optional(number_texts(1, 900).map(lambda t: t + " uK")),
        "cloud.atoms": draw(number_texts(1, 10**9)),
        "cloud.temperature": draw(number_texts(1, 9000)) + draw(st.sampled_from([" nK", " µK", " kHz"])),
        "cloud.model": optional(st.sampled_from([model.value for model in AVAILABLE_MODELS])),
        "losses.background_lifetime": optional(number_texts(1, 900).map(lambda t: t + " s")),
        "losses.three_body": optional(number_texts(1, 99).map(lambda t: t + "e-30 cm^6/s")),
        "losses.heating": optional(number_texts(1, 900).map(lambda t: t + " nK/s")),
        "target.efficiency": optional(number_texts(1, 5)),
    }
    if collisions:
        texts[collisions] = draw(number_texts(1, 500)) + (" a0" if collisions.endswith("length") else " G")
    if target:
        texts[target] = draw(number_texts(1, 1000))
    return plan_with(None, texts)


@settings(deadline=None)
@given(plan=plans())
def test_a_written_plan_is_read_back_as_it_was(plan: Plan) -> None:
    text = write_plan(plan)
    again = parse_plan(text, "a.toml")
    assert again == plan
    assert write_plan(again) == text


@settings(deadline=None)
@given(before=plans(), after=plans())
def test_any_plan_can_be_saved_over_any_other(before: Plan, after: Plan) -> None:
    written = write_plan(after, write_plan(before))
    assert parse_plan(written, "a.toml") == after


def test_every_entry_is_written() -> None:
    plan = read_plan(DATA / "plan_version_1.toml")
    fresh = write_plan(dataclasses.replace(plan, source="", unused=()))
    assert entries_of(parse_plan(fresh, "a.toml")) == entries_of(plan)
    assert f"coldward = {FORMAT}" in fresh


def test_saving_replaces_the_file_and_keeps_its_permissions(tmp_path: Path) -> None:
    path = tmp_path / "plan.toml"
    path.write_text(PLAIN, encoding="utf-8")
    path.chmod(0o640)
    plan = plan_with(read_plan(path), {"cloud.atoms": "3e5"})
    text = save_plan(plan, path)
    assert path.read_text(encoding="utf-8") == text == PLAIN.replace('"1e5"', '"3e5"')
    assert stat.S_IMODE(path.stat().st_mode) == 0o640
    assert os.listdir(tmp_path) == ["plan.toml"]


def test_a_new_file_is_made_and_a_link_stays_a_link(tmp_path: Path) -> None:
    path = tmp_path / "new.toml"
    save_plan(DEFAULT_PLAN, path)
    assert read_plan(path) == DEFAULT_PLAN
    link = tmp_path / "link.toml"
    link.symlink_to(path)
    save_plan(plan_with(DEFAULT_PLAN, {"cloud.atoms": "3e5"}), link)
    assert link.is_symlink()
    assert read_plan(path).cloud.atoms.value == 3e5


def test_line_ends_are_not_touched(tmp_path: Path) -> None:
    path = tmp_path / "plan.toml"
    path.write_bytes(PLAIN.replace("\n", "\r\n").encode())
    save_plan(plan_with(read_plan(path), {"cloud.atoms": "3e5"}), path)
    assert path.read_bytes() == PLAIN.replace('"1e5"', '"3e5"').replace("\n", "\r\n").encode()


def _failing(*_: object, **__: object) -> None:
    raise OSError(28, "No space left on device")


@pytest.mark.parametrize("name", ["os.replace", "os.fsync", "os.chmod"])
def test_a_save_that_fails_leaves_the_old_file_and_no_litter(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str
) -> None:
    path = tmp_path / "plan.toml"
    path.write_text(PLAIN, encoding="utf-8")
    plan = plan_with(read_plan(path), {"cloud.atoms": "3e5"})
    monkeypatch.setattr(app.plan_saving.os, name.removeprefix("os."), _failing)
    sentence = r"plan\.toml could not be written: No space left on device; what was there is unchanged$"
    with pytest.raises(PlanError, match=sentence):
        save_plan(plan, path)
    monkeypatch.undo()
    assert path.read_text(encoding="utf-8") == PLAIN
    assert os.listdir(tmp_path) == ["plan.toml"]


def test_a_folder_that_is_not_there(tmp_path: Path) -> None:
    with pytest.raises(PlanError, match="could not be written: No such file or directory"):
        save_plan(DEFAULT_PLAN, tmp_path / "none" / "plan.toml")


def test_a_write_protected_file_is_not_replaced(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "plan.toml"
    path.write_text(PLAIN, encoding="utf-8")
    refuse: Callable[[object, int], bool] = lambda _path, _mode: False  # noqa: E731 (root may write everything)
    monkeypatch.setattr(app.plan_saving.os, "access", refuse)
    with pytest.raises(PlanError, match="could not be written: it is write-protected"):
        save_plan(DEFAULT_PLAN, path)


# --- the parts check themselves --------------------------------------------------------------------------------------


def test_impossible_parts_are_refused() -> None:
    hertz = read_quantity("120 Hz", FREQUENCY)
    with pytest.raises(PlanError, match="frequencies must be three, got 2"):
        TrapChoice(frequencies=(hertz, hertz))  # type: ignore[arg-type]
    with pytest.raises(PlanError, match="spin_components must be from 1 to 20, got 30"):
        SpeciesChoice(spin_components=30)
    with pytest.raises(PlanError, match="title must be one line"):
        dataclasses.replace(DEFAULT_PLAN, title="a\nb")
