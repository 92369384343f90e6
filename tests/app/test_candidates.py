"""Candidates: the same numbers as for a cloud alone, closed forms, reasons, and nothing unknown that counts as zero."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.answers.candidate_evaporation import EvaporationResult, best_evaporation, evaporate_rows
from app.answers.candidate_row import CandidateRow, Failure
from app.answers.candidates import CandidatesAnswer, candidates_answer, candidates_of
from app.answers.cloud import cloud_answer
from app.candidate_choices import Basis, CandidateChoice, CandidatesChoice, Start, basis_of
from app.candidate_columns import COLUMNS, USUAL_COLUMNS, Part
from app.plan import DEFAULT_PLAN, Plan, PlanError, SpeciesChoice, parse_plan, plan_with, read_plan
from app.process import Stopped
from app.sureness import Sureness
from app.units import ATOM_NUMBER, MAGNETIC_FIELD, SCATTERING_LENGTH, TEMPERATURE, read_quantity
from physics.constants import atomic_mass, boltzmann, reduced_planck
from physics.species import load_species, species_keys

ROOT = Path(__file__).resolve().parents[2]
LIGHT = ROOT / "presets" / "traps" / "crossed_beams_rubidium.toml"
ALL = [(key, state.name) for key in species_keys() for state in load_species(key).states]


def compared(plan: Plan, **choice: object) -> CandidatesAnswer:
    answer = candidates_answer(replace(plan, candidates=CandidatesChoice(**choice)))  # type: ignore[arg-type]
    assert answer is not None
    return answer


@pytest.mark.parametrize(
    ("plan", "usual"), [(DEFAULT_PLAN, Basis.SAME_FREQUENCIES), (read_plan(LIGHT), Basis.SAME_LIGHT)]
)
def test_candidates_are_compared_in_the_light_where_there_is_any(plan: Plan, usual: Basis) -> None:
    assert basis_of(plan) is usual
    assert compared(plan, keys=("87Rb",)).basis is usual
    asked = replace(plan, candidates=CandidatesChoice(basis=Basis.SAME_START))
    assert basis_of(asked) is Basis.SAME_START
    frequencies = replace(plan, candidates=CandidatesChoice(basis=Basis.SAME_FREQUENCIES, keys=("87Rb",)))
    assert compared_as_it_is(frequencies).basis is Basis.SAME_FREQUENCIES


def compared_as_it_is(plan: Plan) -> CandidatesAnswer:
    answer = candidates_answer(plan)
    assert answer is not None
    return answer


def row_of(answer: CandidatesAnswer, key: str, state: str | None = None) -> CandidateRow:
    name = load_species(key).state(state).name
    return next(row for row in answer.rows if (row.key, row.state.name) == (key, name))


@pytest.fixture(scope="module")
def alike() -> CandidatesAnswer:
    """All states in the same frequencies."""
    return compared(DEFAULT_PLAN)


@pytest.fixture(scope="module")
def lit() -> CandidatesAnswer:
    """A few in the same light."""
    return compared(read_plan(LIGHT), basis=Basis.SAME_LIGHT, keys=("87Rb", "40K", "41K", "84Sr", "3He_metastable"))


# --- which, and in what ---


def test_all_states_of_the_data_are_compared_where_none_is_named(alike: CandidatesAnswer) -> None:
    assert [(row.key, row.state.name) for row in alike.rows] == ALL
    assert alike.complete


def test_keys_stand_for_all_states_and_a_candidate_of_its_own_replaces_one() -> None:
    field = read_quantity("850 G", MAGNETIC_FIELD)
    choice = CandidatesChoice(
        keys=("6Li", "41K"),
        candidates=(CandidateChoice(key="li6", state="F=1/2 mF=-1/2 and F=1/2 mF=1/2", field=field),),
    )
    found = candidates_of(replace(DEFAULT_PLAN, candidates=choice))
    assert [c.key for c in found] == ["6Li"] * 7 + ["41K"] * 2
    assert [c.field for c in found if c.field] == [field]
    only = CandidatesChoice(candidates=(CandidateChoice(key="41K"),))
    assert [c.state for c in candidates_of(replace(DEFAULT_PLAN, candidates=only))] == ["F=2 mF=+2"]


def test_an_unknown_species_is_named() -> None:
    with pytest.raises(ValueError, match='no species "87Rx" in the data'):
        compared(DEFAULT_PLAN, keys=("87Rx",))


def test_the_same_light_needs_light() -> None:
    with pytest.raises(PlanError, match="the same light needs a trap of beams or coils"):
        compared(DEFAULT_PLAN, basis=Basis.SAME_LIGHT)


# --- the numbers of a cloud alone ---


@pytest.mark.parametrize(("key", "state"), ALL[::7])
def test_a_row_says_what_the_cloud_alone_says(alike: CandidatesAnswer, key: str, state: str) -> None:
    plan = replace(DEFAULT_PLAN, species=SpeciesChoice(key=key, state=state))
    alone, row = cloud_answer(plan), row_of(alike, key, state)
    assert row.cloud is not None
    assert row.cloud.model is alone.model
    for name, column in COLUMNS.items():
        if column.part is Part.CLOUD:
            missing = alone.missing(column.row) is not None
            value = math.nan if missing else float(alone.value(name))
            assert row.cell(name).value == pytest.approx(value, rel=1e-12, nan_ok=True), name


def test_the_row_of_the_plan_s_own_species_is_the_plan_s_own_answer() -> None:
    plan = plan_with(DEFAULT_PLAN, {"species.scattering_length": "90 a0", "losses.three_body": "1e-28 cm^6/s"})
    answer = compared(plan, keys=("87Rb",))
    own, other = row_of(answer, "87Rb", "F=1 mF=-1"), row_of(answer, "87Rb", "F=2 mF=+2")
    assert own.plan == replace(plan, candidates=own.plan.candidates)
    assert own.cell("three_body_lifetime").value == float(cloud_answer(plan).value("three_body_lifetime"))
    # What is typed of the plan's atoms says nothing of others.
    assert other.plan.species.scattering_length is None
    assert other.plan.losses.three_body is None


def test_own_conditions_of_a_candidate_hold_for_it() -> None:
    own = CandidateChoice(
        key="41K",
        atoms=read_quantity("8e5", ATOM_NUMBER),
        temperature=read_quantity("150 nK", TEMPERATURE),
        scattering_length=read_quantity("50 a0", SCATTERING_LENGTH),
    )
    row = compared(DEFAULT_PLAN, candidates=(own,)).rows[0]
    plain = compared(DEFAULT_PLAN, candidates=(CandidateChoice(key="41K"),)).rows[0]
    # Tc ~ N^(1/3): Bagnato, Pritchard, Kleppner, Phys. Rev. A 35, 4354 (1987).
    assert row.cell("threshold_temperature").value == pytest.approx(2.0 * plain.cell("threshold_temperature").value)
    assert row.cell("scattering_length").sureness is Sureness.SEEN
    assert plain.cell("scattering_length").sureness is Sureness.RECALLED


# --- closed forms ---


def test_in_the_same_frequencies_thresholds_do_not_depend_on_the_mass(alike: CandidatesAnswer) -> None:
    frequency = (120.0 * 120.0 * 20.0) ** (1.0 / 3.0)
    spacing = 2.0 * math.pi * reduced_planck * frequency / boltzmann
    for row in alike.rows:
        # k Tc = hbar wbar (N/zeta(3))^(1/3), k TF = hbar wbar (6 N)^(1/3); here T/TF = 0.5.
        factor = (1e5 / 1.2020569) ** (1.0 / 3.0) if row.bosons else 0.5 * 6e5 ** (1.0 / 3.0)
        assert row.cell("threshold_temperature").value == pytest.approx(spacing * factor, rel=1e-6)
        assert row.cell("mean_frequency").value == pytest.approx(frequency)


def test_in_the_same_light_frequencies_scale_with_mass_at_equal_polarizability() -> None:
    """40K and 41K have one polarizability, and without gravity one potential: f ~ m^(-1/2)."""
    text = LIGHT.read_text().replace("[[trap.beam]]", '[trap]\ngravity = "off"\n\n[[trap.beam]]', 1)
    answer = compared(parse_plan(text, "light.toml"), basis=Basis.SAME_LIGHT, keys=("39K", "41K"))
    light, heavy = row_of(answer, "39K", "F=2 mF=+2"), row_of(answer, "41K", "F=2 mF=+2")
    # Masses from the AME2020 table, Wang et al., Chinese Phys. C 45, 030003 (2021).
    expected = math.sqrt(40.96182526 / 38.96370649)
    ratio = light.cell("mean_frequency").value / heavy.cell("mean_frequency").value
    assert ratio == pytest.approx(expected, rel=1e-6)
    assert light.cell("trap_depth").value == pytest.approx(heavy.cell("trap_depth").value, rel=1e-6)
    assert light.cell("mass").value == pytest.approx(38.96370649 * atomic_mass, rel=1e-7)
    # Recoil energy h^2/(2 m lambda^2) of two photons each: the same scattering heats the lighter one more.
    heat = light.cell("recoil_heating_rate").value / heavy.cell("recoil_heating_rate").value
    assert heat == pytest.approx(expected**2, rel=2e-3)


def test_from_the_same_phase_space_density_all_bosons_are_equally_far() -> None:
    plan = read_plan(LIGHT)
    answer = compared(
        plan, basis=Basis.SAME_START, start=Start.PHASE_SPACE_DENSITY, keys=("87Rb", "41K", "23Na", "40K")
    )
    density = float(cloud_answer(plan).value("peak_phase_space_density"))
    for row in answer.rows:
        assert row.cell("peak_phase_space_density").value == pytest.approx(density, rel=1e-6)
    # In harmonic traps T ~ f at one N; light ones are up to a third wider than that at these temperatures.
    temperatures = np.array([row.plan.cloud.temperature.value for row in answer.rows])
    frequencies = np.array([row.cell("mean_frequency").value for row in answer.rows])
    np.testing.assert_allclose(temperatures / frequencies, temperatures[0] / frequencies[0], rtol=0.35)


def test_from_a_condensate_all_start_equally_condensed() -> None:
    """Its peak phase-space density says nothing; T/Tc follows from the classical one, (T/Tc)^3 = 1.202/D."""
    plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": "60 nK"})
    answer = compared(plan, basis=Basis.SAME_START, start=Start.PHASE_SPACE_DENSITY, keys=("41K", "40K"))
    np.testing.assert_allclose([row.plan.cloud.temperature.value for row in answer.rows], 6e-8, rtol=1e-9)


def test_more_atoms_start_as_much_hotter_in_a_harmonic_trap() -> None:
    """N (hbar wbar/kT)^3 is kept: eight times the atoms, twice the temperature."""
    own = CandidateChoice(key="41K", atoms=read_quantity("8e5", ATOM_NUMBER))
    choice = {"basis": Basis.SAME_START, "start": Start.PHASE_SPACE_DENSITY}
    row = compared(DEFAULT_PLAN, candidates=(own,), **choice).rows[0]
    assert row.plan.cloud.temperature.value == pytest.approx(400e-9, rel=1e-9)


def test_from_the_same_atoms_and_temperature_own_numbers_do_not_count() -> None:
    own = CandidateChoice(key="41K", atoms=read_quantity("8e5", ATOM_NUMBER))
    row = compared(DEFAULT_PLAN, basis=Basis.SAME_START, candidates=(own,)).rows[0]
    assert row.plan.cloud == DEFAULT_PLAN.cloud


def test_in_the_same_frequencies_a_trap_of_beams_gives_those_of_the_plan_s_own_atoms() -> None:
    plan = read_plan(LIGHT)
    same = compared(plan, basis=Basis.SAME_FREQUENCIES, keys=("87Rb", "41K"))
    own = row_of(compared(plan, basis=Basis.SAME_LIGHT, keys=("87Rb",)), "87Rb")
    for row in same.rows:
        assert row.cell("mean_frequency").value == pytest.approx(own.cell("mean_frequency").value)
        assert row.cell("trap_depth").value == pytest.approx(own.cell("trap_depth").value)


# --- where a candidate fails ---


def test_failures_say_where_and_why(lit: CandidatesAnswer, alike: CandidatesAnswer) -> None:
    helium, strontium = row_of(lit, "3He_metastable"), row_of(lit, "84Sr")
    assert helium.failure is strontium.failure is Failure.NOT_TRAPPED
    assert "pushes the atoms out" in helium.reason
    assert "gravity" in strontium.reason
    polarised = row_of(lit, "40K", "F=9/2 mF=-9/2")
    assert polarised.failure is Failure.NO_COLLISIONS
    assert polarised.cell("elastic_collision_rate").value == 0.0  # which is known
    assert row_of(alike, "85Rb").failure is Failure.NO_DATA
    assert "100–250 G" in row_of(alike, "85Rb").reason
    lithium = row_of(alike, "7Li", "F=2 mF=+2")
    assert lithium.failure is Failure.ATTRACTIVE
    most = lithium.cell("collapse_atoms").value
    assert f"beyond {most:.2g}".split("e")[0][:9] in lithium.reason
    # Erbium and dysprosium fermions meet by their dipoles.
    assert row_of(alike, "161Dy").failure is None


def test_a_field_of_the_laboratory_tunes_every_state() -> None:
    answer = compared(plan_with(DEFAULT_PLAN, {"species.field": "160 G"}), keys=("85Rb", "6Li"))
    assert row_of(answer, "85Rb").cell("scattering_length").known
    lithium = row_of(answer, "6Li", "F=1/2 mF=1/2 and F=1/2 mF=-1/2")
    assert lithium.failure is Failure.NO_DATA
    assert "732–932 G" in lithium.reason


def test_a_model_that_cannot_hold_is_replaced_row_by_row() -> None:
    from app.candidate_words import model_reason

    answer = compared(plan_with(DEFAULT_PLAN, {"cloud.model": "Hartree-Fock"}), keys=("87Rb", "7Li", "40K"))
    said = {row.name: (row.cloud.model.value, model_reason(row)) for row in answer.rows if row.cloud is not None}
    assert said["87Rb  F=1 mF=-1"] == ("Hartree-Fock", "")
    assert said["7Li  F=2 mF=+2"] == ("ideal", "Hartree-Fock needs a positive scattering length")
    assert said["7Li  F=1 mF=+1"] == ("ideal", "Hartree-Fock needs a known scattering length")
    assert said["40K  F=9/2 mF=-9/2"] == ("ideal", "Hartree-Fock for bosons only")


# --- how sure ---


def test_what_is_unknown_is_never_a_number(lit: CandidatesAnswer, alike: CandidatesAnswer) -> None:
    for row in (*alike.rows, *lit.rows):
        for name in COLUMNS:
            cell = row.cell(name)
            assert cell.known == (cell.sureness is not Sureness.UNKNOWN)
            assert cell.known == math.isfinite(cell.value)
            if not cell.known:
                assert cell.reason, (row.name, name)
    for row in lit.rows:
        if not row.trapped:
            assert not any(
                row.cell(name).known for name in USUAL_COLUMNS if COLUMNS[name].part not in (Part.TUNING, Part.SPECIES)
            )


@given(st.sampled_from(ALL), st.sampled_from(sorted(COLUMNS)))
@settings(max_examples=60, deadline=None)
def test_nothing_that_needs_an_unknown_number_has_one(which: tuple[str, str], name: str) -> None:
    row = compared(DEFAULT_PLAN, candidates=(CandidateChoice(key=which[0], state=which[1]),)).rows[0]
    assert row.cloud is not None
    losses = row.cloud.losses.losses
    if losses.background_lifetime is losses.two_body is losses.three_body is None:
        assert not row.cell("total_lifetime").known
        assert not row.cell("good_to_bad_ratio").known
    if row.cloud.scattering.value is None and not row.state.polarised:
        assert not row.cell("elastic_collision_rate").known
        assert not row.cell("rethermalisation_time").known
    if not row.cell(name).known:
        assert math.isnan(row.cell(name).value)


def test_a_number_is_as_sure_as_the_least_sure_that_enters(lit: CandidatesAnswer, alike: CandidatesAnswer) -> None:
    rubidium = row_of(alike, "87Rb")
    assert rubidium.cloud is not None
    assert rubidium.cell("threshold_temperature").sureness is Sureness.SEEN
    assert rubidium.cell("elastic_collision_rate").sureness is rubidium.cell("scattering_length").sureness
    # The lines of the alkali atoms are recalled in part: so is all that follows from the light.
    assert row_of(lit, "87Rb").cell("threshold_temperature").sureness is Sureness.RECALLED
    # Fermions have no threshold of their own: T/TF = 0.5 is assumed unless the target names one.
    assert row_of(alike, "40K").cell("threshold_temperature").sureness is Sureness.ASSUMED
    named = compared(plan_with(DEFAULT_PLAN, {"target.reduced_temperature": "0.3"}), keys=("40K",))
    assert named.rows[0].cell("threshold_temperature").sureness is Sureness.SEEN


def test_an_unknown_loss_makes_a_lifetime_an_upper_bound() -> None:
    row = compared(plan_with(DEFAULT_PLAN, {"losses.background_lifetime": "30 s"}), keys=("41K",)).rows[0]
    cell = row.cell("total_lifetime")
    assert cell.value == pytest.approx(30.0)
    assert cell.sureness is Sureness.ASSUMED
    assert "upper bound" in cell.reason


def test_the_demo_compares_what_it_says() -> None:
    answer = compared_as_it_is(read_plan(ROOT / "presets" / "plans" / "which_species.toml"))
    assert answer.basis is Basis.SAME_LIGHT
    assert {row.key for row in answer.rows} >= {"6Li", "23Na", "39K", "40K", "87Rb", "133Cs", "164Dy", "168Er", "174Yb"}
    for row in answer.rows:
        assert row.trapped, row.name
        # With a known scattering length there is a rate, whatever the trap.
        if row.cloud is not None and row.cloud.scattering.value is not None:
            assert row.cell("elastic_collision_rate").value > 0.0, row.name
    lithium = row_of(answer, "6Li", "F=1/2 mF=+1/2 and F=1/2 mF=-1/2")
    assert lithium.failure is None
    assert lithium.cell("scattering_length").value > 1e-7
    # A broad resonance: Chin, Grimm, Julienne, Tiesinga, Rev. Mod. Phys. 82, 1225 (2010), table IV: 834 G, 300 G wide;
    # the data have a later measurement, Zuern et al., Phys. Rev. Lett. 110, 135301 (2013).
    assert lithium.cell("resonance_field").value == pytest.approx(0.0832, rel=0.005)


# --- evaporation ---


class MadeUpProcess:
    """Stands for a process: rubidium takes until it is told to stop, erbium fails, the others are done at once."""

    def __enter__(self) -> MadeUpProcess:
        return self

    def __exit__(self, *_error: object) -> None:
        pass

    def run(self, _task: object, arguments: tuple[Plan], tick: Callable[[float], bool]) -> EvaporationResult:
        key = arguments[0].species.key
        while key == "87Rb":
            if not tick(0.5):
                raise Stopped
        if key == "168Er":
            raise RuntimeError("made up")
        return EvaporationResult(atoms=1e4, time=3.0)


@pytest.fixture
def made_up(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("app.answers.candidate_evaporation.OwnProcess", MadeUpProcess)


@pytest.mark.usefixtures("made_up")
def test_evaporations_come_as_they_are_done_and_hopeless_ones_without_trying() -> None:
    rows = compared(DEFAULT_PLAN, keys=("41K", "40K", "174Yb")).rows
    came: dict[int, EvaporationResult] = {}
    shares: list[float] = []
    done = evaporate_rows(
        rows, lambda place, result: came.update({place: result}) is None, lambda share: shares.append(share) is None
    )
    assert done is not None
    assert sorted(came) == list(range(len(rows)))
    assert shares[-1] == 1.0
    for row in done:
        sound = row.failure is None
        assert row.cell("evaporated_atoms").known is row.cell("evaporation_time").known is sound
        if not sound:
            assert row.cell("evaporated_atoms").reason == row.reason
    # What losses are unknown makes it an upper bound.
    assert {row.cell("evaporated_atoms").sureness for row in done if row.failure is None} == {Sureness.ASSUMED}


@pytest.mark.usefixtures("made_up")
def test_evaporations_that_nobody_wants_any_more_end_at_once() -> None:
    rows = compared(DEFAULT_PLAN, keys=("87Rb",)).rows
    shares: list[float] = []

    def told(share: float) -> bool:
        shares.append(share)
        return share < 0.3

    assert evaporate_rows(rows, told=told) is None
    assert 0.3 <= shares[-1] < 1.0
    assert evaporate_rows(compared(DEFAULT_PLAN, keys=("41K",)).rows, lambda *_found: False) is None


@pytest.mark.usefixtures("made_up")
def test_trouble_in_a_process_reaches_the_one_who_asked() -> None:
    with pytest.raises(RuntimeError, match="made up"):
        evaporate_rows(compared(DEFAULT_PLAN, keys=("168Er",)).rows)


def test_without_a_depth_nothing_can_be_evaporated() -> None:
    result = best_evaporation(DEFAULT_PLAN)
    assert math.isnan(result.atoms)
    assert "depth of the trap must be known" in result.reason


# --- as it goes ---


def test_rows_come_as_they_are_done_and_the_work_can_be_stopped(monkeypatch: pytest.MonkeyPatch) -> None:
    from app.answers import candidates as module

    monkeypatch.setattr(module, "PATIENCE", -1.0)
    seen: list[int] = []
    shares: list[float] = []
    answer = candidates_answer(
        DEFAULT_PLAN,
        lambda part: seen.append(len(part.rows)) is None,
        lambda share: shares.append(share) is None,
    )
    assert answer is not None
    assert seen == list(range(1, len(ALL)))
    assert shares == sorted(shares)
    assert shares[-1] == 1.0
    assert candidates_answer(DEFAULT_PLAN, lambda part: len(part.rows) < 5) is None
    assert candidates_answer(DEFAULT_PLAN, tick=lambda share: share < 0.1) is None
