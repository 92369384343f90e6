"""Saving ramps and what goes with them: nothing else in the file changes, and comments go where their section goes."""

from __future__ import annotations

import difflib
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.kinds import ATOM_NUMBER, CLOUD_WIDTH, DURATION, EXPONENT, SCATTERING_LENGTH, TEMPERATURE, TIME, Kind
from app.plan import (
    DEFAULT_PLAN,
    Basis,
    CandidateChoice,
    CandidatesChoice,
    CloudChoice,
    ControlLimits,
    Handing,
    LimitsChoice,
    MeasuredChoice,
    MoveChoice,
    PassengerChoice,
    Plan,
    SpeciesChoice,
    StageChoice,
    TrapChoice,
    parse_plan,
    write_plan,
)
from app.ramp_fields import CONTROL_KINDS, SPEED_KINDS
from app.units import DEPTH, Quantity, read_quantity
from physics.ramp_shapes import Shape
from physics.ramps import Control, Knob

DATA = Path(__file__).parent.parent / "data"
TEXT = (DATA / "plan_of_a_ramp.toml").read_text(encoding="utf-8")
PLAN = parse_plan(TEXT, "a.toml")
FAST, SCALED, HOLD, HANDED = PLAN.ramp
DEEPER = read_quantity("20 uK", DEPTH)
LONGER = read_quantity("4 s", DURATION)


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


def with_stages(*stages: StageChoice) -> Plan:
    return replace(PLAN, ramp=stages)


def with_move(stage: StageChoice, place: int = 0, **changes: object) -> StageChoice:
    moves = list(stage.moves)
    moves[place] = replace(moves[place], **changes)  # type: ignore[arg-type]
    return replace(stage, moves=tuple(moves))


def test_what_did_not_change_is_written_byte_for_byte() -> None:
    assert write_plan(PLAN) == TEXT
    assert write_plan(replace(PLAN, ramp=(replace(FAST), SCALED, HOLD, HANDED))) == TEXT


@pytest.mark.parametrize("end", ["\n", "\r\n"])
@pytest.mark.parametrize(
    ("stages", "old", "new"),
    [
        ((with_move(FAST, end=DEEPER), SCALED, HOLD, HANDED), 'end = "25 uK"', 'end = "20 uK"'),
        ((FAST, SCALED, replace(HOLD, duration=LONGER), HANDED), 'duration = "300 ms"', 'duration = "4 s"'),
        ((with_move(FAST, shape=Shape.LINEAR), SCALED, HOLD, HANDED), 'shape = "exponential"', 'shape = "linear"'),
        ((FAST, SCALED, HOLD, replace(HANDED, handing=Handing.SUDDEN)), 'transfer = "slow" ', 'transfer = "sudden" '),
        (
            (FAST, SCALED, HOLD, with_move(HANDED, end=read_quantity("0.4 W", CONTROL_KINDS[Knob.POWER]))),
            'end = "0.5 W"',
            'end = "0.4 W"',
        ),
        ((FAST, with_move(SCALED, end=read_quantity("0.3", EXPONENT)), HOLD, HANDED), "end = 0.4", "end = 0.3"),
    ],
)
def test_a_change_is_made_where_it_stands(stages: tuple[StageChoice, ...], old: str, new: str, end: str) -> None:
    text = TEXT.replace("\n", end)
    assert saved(with_stages(*stages), text) == text.replace(old, new, 1)


def test_a_stage_goes_with_its_comments_and_the_others_keep_theirs() -> None:
    went, came = difference(with_stages(FAST, HOLD, HANDED))
    assert came == []
    assert "# all of the trap" in went
    assert "# nothing moves" not in went
    assert len(went) == 9
    went, came = difference(with_stages(FAST, SCALED, HOLD))
    assert came == []
    assert "# and so does beam B" in went
    assert went[0] in ("# into the other trap", "")


def test_stages_change_places_with_all_that_is_theirs() -> None:
    text = saved(with_stages(HANDED, SCALED, FAST, HOLD))
    places = [
        text.index(comment)
        for comment in ("# into the other trap", "# beam A goes down", "# all of the trap", "# first the fast part")
    ]
    assert places == sorted(places)
    assert sorted(text.splitlines()) == sorted(TEXT.splitlines())


def test_a_new_stage_stands_where_it_comes() -> None:
    new = StageChoice(label="new", duration=LONGER, moves=(MoveChoice(control=Control(Knob.DEPTH), end=DEEPER),))
    went, came = difference(with_stages(FAST, new, SCALED, HOLD, HANDED))
    assert went == []
    assert [line for line in came if line] == [
        "[[ramp.stage]]",
        'label = "new"',
        'duration = "4 s"',
        'control = "depth"',
        'end = "20 uK"',
    ]
    text = saved(with_stages(FAST, new, SCALED, HOLD, HANDED))
    assert text.index('label = "new"') < text.index("# all of the trap")


def test_a_second_move_stands_in_a_section_of_its_own() -> None:
    both = replace(HOLD, moves=(FAST.moves[0], SCALED.moves[0]))
    went, came = difference(with_stages(FAST, SCALED, both, HANDED))
    assert went == []
    assert came[:3] == ['control = "depth"', 'end = "25 uK"', 'shape = "exponential"']
    assert "[[ramp.stage.move]]" in came


def test_moves_and_beams_of_a_stage_go_and_come() -> None:
    assert HANDED.trap is not None
    one = replace(HANDED, moves=HANDED.moves[1:], trap=replace(HANDED.trap, beams=HANDED.trap.beams[1:]))
    went, came = difference(with_stages(FAST, SCALED, HOLD, one))
    assert came == []
    assert "# beam A goes down" in went
    assert 'power = "1.2 W"         # behind the window' in went
    back = saved(with_stages(FAST, SCALED, HOLD, HANDED), saved(with_stages(FAST, SCALED, HOLD, one)))
    assert "# and so does beam B" in back
    without = replace(HANDED, trap=None, handing=None, moves=FAST.moves)
    text = saved(with_stages(FAST, SCALED, HOLD, without))
    assert "ramp.stage.trap" not in text
    assert "# the vacuum" in text


def test_limits_and_measured_clouds_change_where_they_stand() -> None:
    depth, power = PLAN.limits.controls
    changed = replace(PLAN, limits=LimitsChoice(time=LONGER, controls=(depth, power)))
    assert saved(changed) == TEXT.replace('time = "12 s"', 'time = "4 s"')
    went, came = difference(replace(PLAN, limits=LimitsChoice(controls=(power,))))
    assert [line for line in came if line] == []
    assert "[limits]" not in went
    assert 'fastest = "40 uK/s"     # the amplifier' in went
    first, second = PLAN.measured
    renamed = replace(PLAN, measured=(first, replace(second, label="by eye")))
    assert saved(renamed) == TEXT.replace('"by widths"', '"by eye"')
    went, came = difference(replace(PLAN, measured=(second,)))
    assert "# pictures of Tuesday" in went
    assert came == []


def test_other_species_change_where_they_stand() -> None:
    one = replace(PLAN, candidates=replace(PLAN.candidates, basis=Basis.SAME_LIGHT))
    assert saved(one) == TEXT.replace('basis = "same start"', 'basis = "same light"')
    went, came = difference(replace(PLAN, candidates=CandidatesChoice()))
    assert came == []
    assert "# the other state" in went
    went, came = difference(replace(PLAN, passenger=None))
    assert came == []
    assert 'key = "40K"             # goes along' in went
    assert PLAN.passenger is not None
    other = replace(PLAN.passenger, scattering_length=None)
    assert difference(replace(PLAN, passenger=other)) == (['scattering_length = "-185 a0"   # between them'], [])


def test_a_header_that_says_what_is_usual_stays() -> None:
    text = TEXT.replace('basis = "same start"    # as asked\nkeys = ["87Rb", "41K"]\n', "# all of them\n")
    assert parse_plan(text, "a.toml").candidates.basis is None
    plan = parse_plan(text, "a.toml")
    one = replace(plan, candidates=replace(plan.candidates, candidates=()))
    assert "[candidates]\n# all of them\n" in saved(one, text)
    named = replace(plan, candidates=replace(plan.candidates, keys=("41K",)))
    assert "# all of them\n" in saved(named, text)


ODD = [
    'ramp = {stage = [{duration = "1 s"}, {duration = "2 s", control = "depth", end = "1 uK"}]}  # short\n',
    'ramp.stage = [{duration = "1 s", move = [{control = "scale", end = 0.5}]}]\n',
    'measured = [{label = "a", atoms = "1e5", temperature = "1 uK"}]  # short\n',
    'limits.time = "2 s"\nlimits.control = [{control = "depth", low = "1 uK"}]\n',
    'candidates = {keys = ["41K"]}\ncandidate = [{key = "40K"}]\n',
    'passenger = {species = {key = "40K"}, cloud = {atoms = "1e4", temperature = "1 uK"}}\n',
    'passenger.species.key = "40K"\npassenger.cloud.atoms = "1e4"\npassenger.cloud.temperature = "1 uK"\n',
]
REST = """
[species]
key = "87Rb"  # mine
[trap]
frequencies = ["400 Hz", "380 Hz", "90 Hz"]
[cloud]
atoms = "2e6"
temperature = "6 uK"
"""


@pytest.mark.parametrize("odd", ODD)
@pytest.mark.parametrize("part", ["ramp", "limits", "measured", "candidates", "passenger"])
def test_odd_layouts_are_saved(odd: str, part: str) -> None:
    text = "coldward = 1  # first\n" + odd + REST
    plan = replace(parse_plan(text, "a.toml"), **{part: getattr(PLAN, part)})
    written = saved(plan, text)
    assert "coldward = 1  # first\n" in written
    assert 'key = "87Rb"  # mine\n' in written
    saved(parse_plan(REST.replace("\n[species]", "coldward = 1\n[species]"), "a.toml"), text)


def test_sections_whose_parts_stand_apart_are_saved() -> None:
    text = TEXT.replace("\n[target]\nreduced_temperature = 0.5\n", "")
    text = text.replace("# beam A goes down\n", "[target]\nreduced_temperature = 0.5\n# beam A goes down\n")
    plan = parse_plan(text, "a.toml")
    assert plan == PLAN
    shorter = saved(with_stages(FAST, SCALED), text)
    assert "# the vacuum" in shorter


# --- any plan over any other ------------------------------------------------------------------------------------------


def quantities(kind: Kind, low: float, high: float, unit: str = "") -> st.SearchStrategy[Quantity]:
    numbers = st.one_of(
        st.integers(round(low), round(high)).map(str), st.floats(low, high).map(lambda value: f"{value:.3f}")
    )
    return numbers.map(lambda number: read_quantity(f"{number} {unit}".strip(), kind))


def values(knob: Knob) -> st.SearchStrategy[Quantity]:
    kind = CONTROL_KINDS[knob]
    return quantities(kind, 1, 900, kind.units[0])


def speeds(knob: Knob) -> st.SearchStrategy[Quantity]:
    kind = SPEED_KINDS[knob]
    return quantities(kind, 1, 900, kind.units[0])


CONTROLS = st.one_of(
    st.sampled_from([knob for knob in Knob if knob is not Knob.POWER]).map(Control),
    st.sampled_from(["A", "B", "lång väg"]).map(lambda name: Control(Knob.POWER, name)),
)
PRINTABLE = st.characters(codec="utf-8").filter(str.isprintable)
LABELS = st.text(PRINTABLE, max_size=8)
SECONDS = quantities(DURATION, 1, 99, "s")


@st.composite
def moves(draw: st.DrawFn, control: Control, duration: Quantity) -> MoveChoice:
    some = values(control.knob)
    shape = draw(st.sampled_from(list(Shape)))
    if shape is Shape.TABLE:
        middle = Quantity("0.5 s", 0.5)
        times = [Quantity("0 s", 0.0), *([middle] if draw(st.booleans()) else []), duration]
        return MoveChoice(control=control, shape=shape, points=tuple((time, draw(some)) for time in times))
    start = draw(st.none() | some)
    if shape is Shape.POWER_LAW:
        exponent = draw(quantities(EXPONENT, 1, 9))
        if draw(st.booleans()):
            return MoveChoice(control=control, start=start, shape=shape, tau=draw(SECONDS), exponent=exponent)
        return MoveChoice(control=control, start=start, shape=shape, end=draw(some), exponent=exponent)
    return MoveChoice(control=control, start=start, shape=shape, end=draw(some))


@st.composite
def stages(draw: st.DrawFn) -> StageChoice:
    duration = draw(SECONDS)
    controls = draw(st.lists(CONTROLS, max_size=3, unique=True))
    trap = draw(st.none() | st.none() | st.sampled_from(TRAPS))
    return StageChoice(
        label=draw(LABELS),
        duration=duration,
        moves=tuple(draw(moves(control, duration)) for control in controls),
        trap=trap,
        handing=None if trap is None else draw(st.sampled_from(list(Handing))),
    )


@st.composite
def limits(draw: st.DrawFn) -> LimitsChoice:
    controls = draw(st.lists(CONTROLS, max_size=3, unique=True))
    return LimitsChoice(
        time=draw(st.none() | SECONDS),
        controls=tuple(
            ControlLimits(
                control=control,
                low=draw(
                    st.none() | quantities(CONTROL_KINDS[control.knob], 1, 9, CONTROL_KINDS[control.knob].units[0])
                ),
                high=draw(
                    st.none() | quantities(CONTROL_KINDS[control.knob], 10, 99, CONTROL_KINDS[control.knob].units[0])
                ),
                fastest=draw(st.none() | speeds(control.knob)),
            )
            for control in controls
        ),
    )


ATOMS, KELVIN = quantities(ATOM_NUMBER, 1, 10**7), quantities(TEMPERATURE, 1, 900, "nK")
TRAPS: list[TrapChoice] = [
    *(parse_plan(path.read_text(encoding="utf-8"), path.name).trap for path in sorted(DATA.glob("plan_of_*.toml"))),
    DEFAULT_PLAN.trap,
]
WIDTHS = st.lists(quantities(CLOUD_WIDTH, 1, 900, "um"), min_size=1, max_size=3).map(tuple)
MEASURED = st.builds(
    lambda by_stage, **rest: MeasuredChoice(**rest, **({"stage": 2} if by_stage else {})),
    by_stage=st.booleans(),
    label=LABELS.filter(str.strip),
    atoms=ATOMS,
    temperature=KELVIN,
) | st.builds(
    MeasuredChoice,
    label=LABELS.filter(str.strip),
    atoms=ATOMS,
    time=st.none() | quantities(TIME, 0, 20, "s"),
    widths=WIDTHS,
    expansion_time=quantities(TIME, 0, 50, "ms"),
)
KEYS = st.sampled_from(["87Rb", "41K", "6Li", "133Cs"])
LENGTHS = quantities(SCATTERING_LENGTH, -500, 500, "a0")
CANDIDATE = st.builds(
    CandidateChoice,
    key=KEYS,
    atoms=st.none() | ATOMS,
    temperature=st.none() | KELVIN,
    scattering_length=st.none() | LENGTHS,
)
CANDIDATES = st.builds(
    CandidatesChoice,
    basis=st.sampled_from(list(Basis)),
    keys=st.lists(KEYS, max_size=3, unique=True).map(tuple),
    candidates=st.lists(CANDIDATE, max_size=3).map(tuple),
)
PASSENGERS = st.builds(
    PassengerChoice,
    species=st.builds(SpeciesChoice, key=KEYS, scattering_length=st.none() | LENGTHS),
    cloud=st.builds(CloudChoice, atoms=ATOMS, temperature=KELVIN),
    scattering_length=st.none() | LENGTHS,
)
PLANS = st.builds(
    lambda **parts: replace(DEFAULT_PLAN, **parts),
    trap=st.sampled_from(TRAPS),
    ramp=st.lists(stages(), max_size=4).map(tuple),
    limits=limits(),
    measured=st.lists(MEASURED, max_size=3).map(tuple),
    candidates=CANDIDATES,
    passenger=st.none() | PASSENGERS,
)


@settings(max_examples=60, deadline=None)
@given(plan=PLANS)
def test_a_written_plan_is_read_back_as_it_was(plan: Plan) -> None:
    text = write_plan(plan)
    again = parse_plan(text, "a.toml")
    assert again == plan
    assert write_plan(again) == text


@settings(max_examples=60, deadline=None)
@given(before=PLANS, after=PLANS, end=st.sampled_from(["\n", "\r\n"]))
def test_any_plan_can_be_saved_over_any_other(before: Plan, after: Plan, end: str) -> None:
    saved(after, write_plan(before).replace("\n", end))


@settings(max_examples=60, deadline=None)
@given(data=st.data(), plan=PLANS)
def test_stages_in_any_order_keep_their_comments(data: st.DataObject, plan: Plan) -> None:
    """Of stages that say different things each has a comment, and one stage is changed besides."""
    told = tuple(replace(stage, label=f"number {n}") for n, stage in enumerate(plan.ramp))
    plan = replace(plan, ramp=told)
    parts = write_plan(plan).split("[[ramp.stage]]\n")
    text = parts[0] + "".join(f"# of number {n}\n[[ramp.stage]]\n{part}" for n, part in enumerate(parts[1:]))
    kept = data.draw(st.permutations(range(len(told))))
    kept = kept[: data.draw(st.integers(0, len(kept)))]
    ramp = [told[n] for n in kept]
    if ramp and not any(move.points for move in ramp[0].moves):
        ramp[0] = replace(ramp[0], duration=read_quantity("123 s", DURATION))
    after = saved(replace(plan, ramp=tuple(ramp)), text)
    lines = [line for line in after.splitlines() if line.startswith("# of number")]
    assert lines == [f"# of number {n}" for n in kept]
