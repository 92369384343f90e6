"""Reading plan files: strictly, with errors in one sentence."""

from __future__ import annotations

import dataclasses
import subprocess
import sys
from pathlib import Path

import pytest

from app.plan import (
    DEFAULT_PLAN,
    CloudChoice,
    LossesChoice,
    PlanError,
    SpeciesChoice,
    parse_plan,
    read_plan,
    write_plan,
)
from app.units import (
    DEPTH,
    EFFICIENCY,
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
PLAIN = (DATA / "plan_plain.toml").read_text(encoding="utf-8")


def changed(old: str, new: str) -> str:
    assert old in PLAIN
    return PLAIN.replace(old, new)


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
