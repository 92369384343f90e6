"""Saving traps of beams and coils: nothing else in the file changes, and comments go where their section goes."""

from __future__ import annotations

import difflib
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.kinds import Kind
from app.plan import DEFAULT_PLAN, Plan, parse_plan, plan_with, read_plan, save_plan, write_plan
from app.trap_choices import ORIGIN, BeamChoice, CoilsChoice, Direction, Gravity, Place, TrapChoice
from app.units import (
    BEAM_POWER,
    BEAM_QUALITY,
    BEAM_WAIST,
    BIAS_FIELD,
    FIELD_CURVATURE,
    FIELD_GRADIENT,
    POSITION,
    RADIO_FREQUENCY,
    WAVELENGTH,
    Quantity,
    read_quantity,
)

FILE = Path(__file__).parent.parent / "data" / "plan_of_beams_and_coils.toml"
TEXT = FILE.read_text(encoding="utf-8")
PLAN = parse_plan(TEXT, "a.toml")
A, CROSS = PLAN.trap.beams
COILS = PLAN.trap.coils
assert COILS is not None
WATTS = read_quantity("3 W", BEAM_POWER)


def with_trap(plan: Plan = PLAN, **changes: object) -> Plan:
    return replace(plan, trap=replace(plan.trap, **changes))  # type: ignore[arg-type]


def saved(plan: Plan, text: str = TEXT) -> str:
    """The new file, which must say what the plan says, now and after it was saved again."""
    written = write_plan(plan, text)
    again = parse_plan(written, "b.toml")
    assert again == plan
    assert write_plan(again) == written
    return written


def difference(plan: Plan, text: str = TEXT) -> tuple[list[str], list[str]]:
    """Lines that went, and lines that came."""
    lines = list(difflib.ndiff(text.splitlines(), saved(plan, text).splitlines()))
    return [line[2:] for line in lines if line[0] == "-"], [line[2:] for line in lines if line[0] == "+"]


def test_what_did_not_change_is_written_byte_for_byte() -> None:
    assert write_plan(PLAN) == TEXT
    assert write_plan(PLAN, TEXT.replace("\n", "\r\n")) == TEXT.replace("\n", "\r\n")
    assert write_plan(with_trap(beams=(A, replace(CROSS)))) == TEXT


def test_a_power_changes_its_text_and_nothing_else() -> None:
    stronger = with_trap(beams=(replace(A, power=WATTS), CROSS))
    assert saved(stronger) == TEXT.replace('"2.5(1) W"', '"3 W"')
    windows = TEXT.replace("\n", "\r\n")
    assert saved(stronger, windows) == windows.replace('"2.5(1) W"', '"3 W"')


@pytest.mark.parametrize(
    ("plan", "old", "new"),
    [
        (with_trap(beams=(A, replace(CROSS, on=True))), "on = false", "on = true"),
        (with_trap(beams=(replace(A, on=False), CROSS)), "on = true", "on = false"),
        (with_trap(beams=(A, replace(CROSS, name="B"))), 'name = "cross"', 'name = "B"'),
        (with_trap(beams=(replace(A, direction=(1.0, 0.25, 0.0)), CROSS)), "[1, 0, 0]", "[1, 0.25, 0]"),
        (
            with_trap(beams=(A, replace(CROSS, focus=ORIGIN))),
            '["0 um", "-10 um", "0.2 mm"]',
            '["0 µm", "0 µm", "0 µm"]',
        ),
        (with_trap(beams=(A, replace(CROSS, m2=None))), "m2 = 1.1\n", ""),
        (with_trap(gravity=Gravity.OFF, coils=replace(COILS, levitation=None)), "", ""),
        (with_trap(gravity=(0.0, -1.0, 0.0)), "[0, -1, -1]", "[0, -1, 0]"),
        (with_trap(gravity=None), "gravity = [0, -1, -1]                 # the table is tilted\n", ""),
        (with_trap(coils=replace(COILS, axis=(0.0, 0.0, 1.0))), "[0, 0, 2]", "[0, 0, 1]"),
        (with_trap(coils=replace(COILS, knife=None)), 'knife = "2.1 MHz"\n', ""),
        (
            with_trap(coils=replace(COILS, curvature=read_quantity("150 G/cm^2", FIELD_CURVATURE))),
            'knife = "2.1 MHz"\n',
            'knife = "2.1 MHz"\ncurvature = "150 G/cm^2"\n',
        ),
    ],
)
def test_a_change_is_made_where_it_stands(plan: Plan, old: str, new: str) -> None:
    text = saved(plan)
    if old:
        assert text == TEXT.replace(old, new, 1)


def test_a_round_beam_becomes_an_elliptical_one_and_back() -> None:
    two = (read_quantity("70 um", BEAM_WAIST), read_quantity("50 um", BEAM_WAIST))
    went, came = difference(with_trap(beams=(replace(A, waists=two), replace(CROSS, waists=two[:1]))))
    assert went == ['waist = "70 um"', 'waists = ["60 um", "45 um"]           # horizontal, vertical']
    assert came == ['waists = ["70 um", "50 um"]', 'waist = "70 um"']


def test_a_beam_goes_with_its_comments_and_the_others_keep_theirs() -> None:
    went, came = difference(with_trap(beams=(CROSS,)))
    assert came == []
    assert "# along the long bench" in went
    assert "# through the other windows" in saved(with_trap(beams=(CROSS,)))
    text = saved(with_trap(beams=(A,)))
    assert "# through the other windows" not in text
    assert "# the round ones\n[trap.coils]" in text
    text = saved(with_trap(beams=(A, CROSS), coils=None))
    assert "# the round ones" not in text
    assert text.endswith('m2 = 1.1\n\n[cloud]\natoms = "1.0(1)e5"\ntemperature = "200(10) nK"\n')


def test_beams_change_places_with_their_comments() -> None:
    text = saved(with_trap(beams=(CROSS, A)))
    assert sorted(text.splitlines()) == sorted(TEXT.splitlines())
    assert text.index("# through the other windows") < text.index('"cross"') < text.index("# along the long bench")
    assert saved(PLAN, text) == TEXT


def test_beams_and_coils_are_added_after_the_others() -> None:
    new = replace(CROSS, name="C", power=WATTS, focus=ORIGIN, m2=None)
    went, came = difference(with_trap(beams=(A, CROSS, new)))
    assert went == []
    assert [line for line in came if line] == [
        "[[trap.beam]]", 'name = "C"', "on = false", 'wavelength = "1.064 um"', 'power = "3 W"',
        'waists = ["60 um", "45 um"]', "direction = [0.5, 0.8660254, 0]",
    ]  # fmt: skip
    assert saved(with_trap(beams=(new, A, CROSS))).index('"C"') < TEXT.index('"A"')
    without = saved(with_trap(coils=None))
    went, came = difference(PLAN, without)
    assert went == []
    assert came[:2] == ["[trap.coils]", "axis = [0, 0, 2]"]


def test_a_renamed_beam_stays_in_its_place() -> None:
    other = replace(A, name="long bench", power=WATTS)
    went, came = difference(with_trap(beams=(other, CROSS)))
    assert went == ['name = "A"', 'power = "2.5(1) W"                    # behind the fibre']
    assert came == ['name = "long bench"', 'power = "3 W"                    # behind the fibre']


UNNAMED = """\
coldward = 1
species.key = "87Rb"
cloud = { atoms = "1e5", temperature = "200 nK" }
[[trap.beam]]
wavelength = "1064 nm"
power = "1 W"  # first
waist = "70 um"
direction = [1, 0, 0]
[[trap.beam]]
wavelength = "1064 nm"
power = "2 W"  # second
waist = "70 um"
direction = [0, 1, 0]"""


def test_beams_without_names_keep_the_ones_they_had() -> None:
    plan = parse_plan(UNNAMED, "a.toml")
    a, b = plan.trap.beams
    assert saved(with_trap(plan, beams=(replace(a, power=WATTS), b)), UNNAMED) == UNNAMED.replace('"1 W"', '"3 W"')
    went, came = difference(with_trap(plan, beams=(b,)), UNNAMED)
    assert len(went) == 5
    assert came == ['name = "B"']
    text = saved(with_trap(plan, beams=(b, a)), UNNAMED)
    assert text.index('name = "B"') < text.index("# second") < text.index('name = "A"') < text.index("# first")


def test_frequencies_take_the_place_of_beams_and_coils_in_the_file() -> None:
    harmonic = plan_with(PLAN, {"trap.frequencies": "100 Hz, 90 Hz, 20 Hz", "trap.depth": "5 uK"})
    text = saved(harmonic)
    assert "beam" not in text.partition("[trap]")[2]
    assert "coils" not in text.partition("[trap]")[2]
    assert "gravity = [0, -1, -1]                 # the table is tilted\n" in text
    assert "[trap]\ngravity" in text
    back = saved(PLAN, text)
    assert "frequencies" not in back
    assert "depth" not in back
    no_table = plan_with(parse_plan(UNNAMED, "a.toml"), {"trap.frequencies": "100 Hz, 90 Hz, 20 Hz"})
    assert saved(no_table, UNNAMED).endswith('[trap]\nfrequencies = ["100 Hz", "90 Hz", "20 Hz"]\n')


def test_beams_beside_frequencies_stay_until_beams_are_wanted() -> None:
    path = FILE.with_name("plan_version_1.toml")
    both = read_plan(path)
    text = path.read_text(encoding="utf-8")
    assert saved(plan_with(both, {"trap.depth": "6 uK"}), text) == text.replace('"5 uK"', '"6 uK"', 1)
    written = saved(replace(both, trap=PLAN.trap, unused=both.unused[2:]), text)
    assert '"2.5 W"' not in written
    assert 'keys = ["87Rb", "41K", "133Cs"]' in written


ODD = {
    "one line": (
        'coldward = 1 # x\nspecies.key = "87Rb"\ncloud = { atoms = "1e5", temperature = "200 nK" } # y\n'
        'trap = { beam = [{ wavelength = "1 um", power = "1 W", waist = "9 um", direction = [1, 1, 1] }], '
        'coils = { gradient = "1 G/cm" } }\n[limits]\ntime = "1 s"\n'
    ),
    "dotted": (
        'coldward = 1 # x\nspecies.key = "87Rb"\ncloud.atoms = "1e5"\ncloud.temperature = "200 nK" # y\n'
        'trap.gravity = "off"\ntrap.coils.gradient = "1 G/cm"\n[limits]\ntime = "1 s"\n'
    ),
    "quoted": (
        'coldward = 1 # x\nspecies.key = "87Rb"\ncloud = { atoms = "1e5", temperature = "200 nK" } # y\n'
        '[["trap".beam]]\nwavelength = "1 um"\npower = "1 W"\nwaist = "9 um"\ndirection = [1, 1, 1]\n'
        '[limits]\ntime = "1 s"\n'
    ),
    "apart": (
        'coldward = 1 # x\n[[trap.beam]]\nwavelength = "1 um"\npower = "1 W"\nwaist = "9 um"\ndirection = [1, 1, 1]\n'
        '[species]\nkey = "87Rb"\n[trap.coils]\ngradient = "1 G/cm"\n[cloud]\natoms = "1e5"\n'
        'temperature = "200 nK" # y\n[limits]\ntime = "1 s"\n[trap]\ngravity = [0, 0, 1]\n'
    ),
    "harmonic in one line": (
        'coldward = 1 # x\nspecies.key = "87Rb"\ncloud = { atoms = "1e5", temperature = "200 nK" } # y\n'
        'trap = { frequencies = ["1 Hz", "2 Hz", "3 Hz"] }\n[limits]\ntime = "1 s"\n'
    ),
}  # fmt: skip


@pytest.mark.parametrize("text", ODD.values(), ids=ODD.keys())
@pytest.mark.parametrize(
    "trap",
    [
        PLAN.trap,
        replace(PLAN.trap, coils=None),
        replace(PLAN.trap, beams=()),
        replace(PLAN.trap, beams=(replace(A, power=WATTS),), gravity=None),
        replace(DEFAULT_PLAN.trap, gravity=Gravity.OFF),
    ],
)
def test_odd_layouts_are_saved_and_other_sections_stay(text: str, trap: TrapChoice) -> None:
    written = saved(replace(parse_plan(text, "a.toml"), trap=trap), text)
    assert 'time = "1 s"' in written
    assert "coldward = 1 # x\n" in written
    assert "# y" in written


def test_a_saved_file_is_read_back(tmp_path: Path) -> None:
    path = tmp_path / "plan.toml"
    path.write_text(TEXT, encoding="utf-8")
    changed = with_trap(read_plan(path), beams=(CROSS, replace(A, power=WATTS)))
    save_plan(changed, path)
    assert read_plan(path) == changed


# --- any trap over any other -----------------------------------------------------------------------------------------


def quantities(kind: Kind, low: float, high: float, unit: str) -> st.SearchStrategy[Quantity]:
    numbers = st.one_of(
        st.integers(round(low), round(high)).map(str), st.floats(low, high).map(lambda value: f"{value:.3f}")
    )
    return numbers.map(lambda number: read_quantity(f"{number} {unit}".strip(), kind))


NUMBERS = st.one_of(st.integers(-9, 9).map(float), st.floats(-2, 2, allow_subnormal=False))
DIRECTIONS: st.SearchStrategy[Direction] = st.tuples(NUMBERS, NUMBERS, NUMBERS).filter(
    lambda d: max(map(abs, d)) > 1e-3
)
LENGTH = quantities(POSITION, -500, 500, "µm")
PLACES: st.SearchStrategy[Place] = st.one_of(st.just(ORIGIN), st.tuples(LENGTH, LENGTH, LENGTH))
WAIST = quantities(BEAM_WAIST, 1, 900, "um")
PRINTABLE = st.characters(codec="utf-8").filter(str.isprintable)
NAMES = st.one_of(
    st.sampled_from(["A", "B", "C"]),
    st.text(PRINTABLE, min_size=1, max_size=8).filter(lambda name: name == name.strip()),
)
BEAMS = st.builds(
    BeamChoice,
    name=NAMES,
    wavelength=quantities(WAVELENGTH, 300, 1600, "nm"),
    power=quantities(BEAM_POWER, 0, 30, "W"),
    waists=st.one_of(st.tuples(WAIST), st.tuples(WAIST, WAIST)),
    direction=DIRECTIONS,
    focus=PLACES,
    on=st.booleans(),
    m2=st.none() | quantities(BEAM_QUALITY, 1, 9, ""),
)
COIL_SETS = st.builds(
    CoilsChoice,
    axis=DIRECTIONS,
    centre=PLACES,
    bias=st.none() | quantities(BIAS_FIELD, -9, 900, "G"),
    gradient=quantities(FIELD_GRADIENT, -300, 300, "G/cm"),
    curvature=st.none() | quantities(FIELD_CURVATURE, -300, 300, "G/cm^2"),
    knife=st.none() | quantities(RADIO_FREQUENCY, 1, 90, "MHz"),
)
MADE = st.builds(
    TrapChoice,
    gravity=st.none() | st.just(Gravity.OFF) | DIRECTIONS,
    beams=st.lists(BEAMS, max_size=4, unique_by=lambda beam: beam.name).map(tuple),
    coils=COIL_SETS,
) | st.builds(
    TrapChoice,
    gravity=st.none() | st.just(Gravity.OFF) | DIRECTIONS,
    beams=st.lists(BEAMS, min_size=1, max_size=4, unique_by=lambda beam: beam.name).map(tuple),
)
TRAPS = st.one_of(MADE, MADE, st.just(DEFAULT_PLAN.trap))


@settings(max_examples=60, deadline=None)
@given(trap=TRAPS)
def test_a_written_trap_is_read_back_as_it_was(trap: TrapChoice) -> None:
    plan = replace(DEFAULT_PLAN, trap=trap)
    text = write_plan(plan)
    again = parse_plan(text, "a.toml")
    assert again == plan
    assert write_plan(again) == text


@settings(max_examples=60, deadline=None)
@given(before=TRAPS, after=TRAPS, layout=st.sampled_from(["\n", "\r\n"]))
def test_any_trap_can_be_saved_over_any_other(before: TrapChoice, after: TrapChoice, layout: str) -> None:
    text = write_plan(replace(DEFAULT_PLAN, trap=before)).replace("\n", layout)
    saved(replace(DEFAULT_PLAN, trap=after), text)


@settings(max_examples=60, deadline=None)
@given(data=st.data(), trap=MADE)
def test_beams_in_any_order_keep_their_comments(data: st.DataObject, trap: TrapChoice) -> None:
    plan = replace(DEFAULT_PLAN, trap=trap)
    parts = write_plan(plan).split("[[trap.beam]]\n")
    text = parts[0] + "".join(f"# of number {n}\n[[trap.beam]]\n{part}" for n, part in enumerate(parts[1:]))
    kept = data.draw(st.permutations(range(len(trap.beams))))
    kept = kept[: data.draw(st.integers(0 if trap.coils is not None else 1, len(kept)))]
    after = saved(replace(plan, trap=replace(trap, beams=tuple(trap.beams[n] for n in kept))), text)
    lines = [line for line in after.splitlines() if line.startswith("# of number")]
    assert lines == [f"# of number {n}" for n in kept]
