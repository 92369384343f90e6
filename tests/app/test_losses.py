"""Losses of a plan in its answer: typed or from the data, uncertain, missing, and in words."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from app.__main__ import main
from app.caveat_words import caveat_lines, caveat_text
from app.engine import CloudAnswer, cloud_answer, slices_answer, trap_answer
from app.explanations.explain import disagreeing, explain
from app.plan import DEFAULT_PLAN, plan_with, read_plan
from app.quantities import QUANTITIES, Group, Need, rows_in

CERTAIN = {
    "cloud.atoms": "1e5", "cloud.temperature": "200 nK", "trap.frequencies": "120 Hz, 120 Hz, 20 Hz",
    "losses.background_lifetime": "60 s",
}  # fmt: skip


def answer(**texts: str) -> CloudAnswer:
    """The answer of the plain plan with entries replaced; `__` stands for the dot of a path."""
    return cloud_answer(plan_with(DEFAULT_PLAN, CERTAIN | {path.replace("__", "."): t for path, t in texts.items()}))


def ids(found: CloudAnswer) -> set[str]:
    return {caveat.id for caveat in found.caveats}


# --- where the numbers come from ---


def test_constants_come_from_the_data_unless_typed() -> None:
    data, typed = answer(), answer(losses__three_body="1e-28 cm^6/s")
    assert data.losses.losses.three_body == pytest.approx(4.3e-41, rel=1e-12)
    assert data.losses.three_body is not None
    assert typed.losses.losses.three_body == pytest.approx(1e-40, rel=1e-12)
    assert typed.losses.three_body is None
    assert float(data.value("three_body_lifetime")) == pytest.approx(
        float(typed.value("three_body_lifetime")) / 0.43, rel=1e-12
    )


def test_a_lifetime_is_read_back_and_all_losses_add() -> None:
    found = answer(losses__two_body="1e-14 cm^3/s")
    assert found.value("background_lifetime") == 60.0
    parts = [1.0 / float(found.value(f"{name}_lifetime")) for name in ("background", "two_body", "three_body")]
    assert 1.0 / float(found.value("total_lifetime")) == pytest.approx(sum(parts), rel=1e-12)


def test_strong_dipoles_collide_and_weak_ones_are_left_out() -> None:
    assert answer().cloud.dipolar_length is None
    erbium = answer(species__key="167Er")
    assert erbium.cloud.dipolar_length is not None
    assert float(erbium.value("elastic_collision_rate")) > 0.0
    assert "polarised_fermions" not in ids(erbium)
    # Its states together have no common moment.
    assert answer(species__key="167Er", species__spin_components="2").cloud.dipolar_length is None


# --- what is missing ---


def test_what_losses_lack_is_named() -> None:
    found = answer(losses__background_lifetime="")
    assert found.missing(QUANTITIES["background_lifetime"]) is Need.BACKGROUND
    assert found.missing(QUANTITIES["two_body_lifetime"]) is Need.TWO_BODY
    assert found.missing(QUANTITIES["three_body_lifetime"]) is None
    assert found.missing(QUANTITIES["total_lifetime"]) is None
    nothing = answer(species__key="41K", losses__background_lifetime="")
    for name in ("total_lifetime", "good_to_bad_ratio", "loss_heating_rate", "loss_per_rethermalisation"):
        assert nothing.missing(QUANTITIES[name]) is Need.LOSSES
    assert nothing.missing(QUANTITIES["three_body_lifetime"]) is Need.THREE_BODY
    assert nothing.missing(QUANTITIES["heating_rate"]) is Need.HEATING
    cold = answer(cloud__temperature="50 nK")
    assert cold.missing(QUANTITIES["loss_heating_rate"]) is Need.NO_CONDENSATE


def test_what_fermions_lack_is_named() -> None:
    polarised = answer(species__key="40K", species__spin_components="1")
    assert polarised.missing(QUANTITIES["interaction_parameter"]) in (None, Need.MIXTURE)
    free = answer(species__key="3He_metastable")
    assert free.missing(QUANTITIES["interaction_parameter"]) is Need.MIXTURE
    assert free.missing(QUANTITIES["rethermalisation_time"]) is Need.COLLIDING
    assert free.missing(QUANTITIES["fermi_radii"]) is None
    strong = {"species__key": "6Li", "cloud__atoms": "1e6"}
    assert answer(**strong, species__scattering_length="-1000 a0").missing(QUANTITIES["pair_binding_energy"]) is (
        Need.POSITIVE_LENGTH
    )
    between = answer(**strong, species__scattering_length="-10000 a0")
    assert -1.0 < float(between.value("interaction_parameter")) < -0.2
    assert between.missing(QUANTITIES["superfluid_temperature"]) is Need.KNOWN_COUPLING


@pytest.mark.parametrize("key", ["87Rb", "6Li", "40K", "167Er", "3He_metastable"])
def test_every_need_can_be_told(key: str) -> None:
    found = answer(species__key=key)
    for row in QUANTITIES.values():
        assert found.missing(row) is None or found.missing(row) in row.needs


@pytest.mark.parametrize("model", ["ideal", "semi-ideal", "Hartree-Fock", "exact levels"])
def test_every_row_without_a_need_has_a_number(model: str) -> None:
    for temperature in ("200 nK", "90 nK"):
        found = answer(cloud__model=model, cloud__temperature=temperature, trap__depth="5 uK")
        for group in (Group.COLLISIONS, Group.LOSSES):
            for row in rows_in(group):
                if found.missing(row) is None:
                    assert np.all(np.isfinite(found.value(row.name))), row.name


# --- uncertainty and slices ---


def test_an_uncertain_lifetime_spreads_what_depends_on_it() -> None:
    found = answer(losses__background_lifetime="60(6) s")
    lifetime, total, density = (
        found.spread(name) for name in ("background_lifetime", "total_lifetime", "peak_density")
    )
    assert lifetime is not None
    assert total is not None
    assert density is not None
    # A log-normal with a tenth of spread: 84 % is 0.9945 standard deviations.
    assert float(lifetime.low) == pytest.approx(60.0 * np.exp(-0.0992), rel=2e-3)
    assert float(lifetime.high) == pytest.approx(60.0 * np.exp(0.0992), rel=2e-3)
    assert float(total.low) < float(found.value("total_lifetime")) < float(total.high)
    assert float(density.low) == float(density.high) == pytest.approx(float(found.value("peak_density")), rel=1e-12)


def test_slices_show_losses_too() -> None:
    plan = plan_with(DEFAULT_PLAN, CERTAIN)
    slices = slices_answer(plan, ("three_body_lifetime", "free_path_ratios"))
    here = np.exp(np.interp(np.log(2e-7), np.log(slices.temperature_grid), np.log(slices.values_temperature[0])))
    assert here == pytest.approx(slices.now[0], rel=1e-3)
    longer = plan_with(plan, {"losses.three_body": "1e-30 cm^6/s"})
    assert slices_answer(longer, ("three_body_lifetime",)).now[0] > slices.now[0]


# --- caveats in words ---


@pytest.mark.parametrize(
    ("texts", "name", "words"),
    [
        ({"losses__background_lifetime": ""}, "no_background", "No background lifetime is given"),
        ({"species__key": "41K"}, "three_body_unknown", "three-body rate constant is not known"),
        ({"cloud__temperature": "150 nK"}, "three_body_recalled", "4.3e-29 cm^6/s is recalled"),
        ({"species__key": "1H", "cloud__atoms": "1e9"}, "two_body_recalled", "1.1e-15 cm^3/s is recalled"),
        ({"losses__three_body": "1e-27 cm^6/s"}, "three_body_scaling", "8.5 times"),
        ({"losses__three_body": "1e-20 cm^6/s"}, "three_body_unitarity", "what is possible at this temperature"),
        ({"species__scattering_length": "200 a0"}, "three_body_elsewhere", "by a⁴ it changes 16 times"),
        ({"cloud__atoms": "500", "cloud__temperature": "3 µK"}, "loss_fast", "no equilibrium"),
        ({"losses__heating": "2 µK/s"}, "heating_fast", "in one rethermalisation time: no steady cloud"),
        ({"cloud__model": "ideal", "cloud__temperature": "60 nK"}, "loss_ideal_condensate", "1/cm^3"),
        ({"species__key": "164Dy", "cloud__temperature": "10 µK"}, "dipolar_fast", "k a_d is"),
    ],
)
def test_a_caveat_says_its_number_and_what_to_do(texts: dict[str, str], name: str, words: str) -> None:
    found = answer(**texts)
    caveat = next(caveat for caveat in found.caveats if caveat.id == name)
    assert words in caveat_text(caveat, found)
    plain = answer(losses__three_body="4e-29 cm^6/s")
    assert name not in ids(plain)


def test_a_plan_with_all_its_losses_is_not_told_of_unused_sections() -> None:
    assert not any("[losses]" in line.sentence for line in caveat_lines(answer(losses__heating="1 nK/s")))


# --- command line ---


def test_flags_and_json(capsys: pytest.CaptureFixture[str]) -> None:
    flags = [
        "state", "--species", "87Rb", "--frequencies", "120 Hz, 120 Hz, 20 Hz", "--atoms", "1e5",
        "--temperature", "200 nK", "--background-lifetime", "30 s", "--two-body", "1e-14 cm^3/s",
        "--three-body", "1e-28 cm^6/s", "--heating", "5 nK/s", "--json",
    ]  # fmt: skip
    assert main(flags) == 0
    quantities: dict[str, Any] = json.loads(capsys.readouterr().out)["quantities"]
    assert quantities["background_lifetime"]["value"] == 30.0
    assert quantities["background_lifetime"]["unit"] == "s"
    assert quantities["three_body_lifetime"]["value"] > 100.0
    assert quantities["heating_rate"]["value"] == pytest.approx(5e-9, rel=0.2)
    assert quantities["pair_binding_energy"]["reason"] == "needs fermions"


def test_a_flag_that_cannot_be_read_is_named(capsys: pytest.CaptureFixture[str]) -> None:
    flags = ["state", "--species", "87Rb", "--frequencies", "120 Hz,120 Hz,20 Hz", "--atoms", "1e5",
             "--temperature", "200 nK", "--three-body", "4e-29 cm^3/s"]  # fmt: skip
    assert main(flags) == 1
    assert '--three-body: "cm^3/s" is not a unit of three-body rate constant' in capsys.readouterr().err


# --- forms ---


def test_choosing_another_species_in_a_form_drops_the_constants_of_the_old_one() -> None:
    from app.widgets.form import plan_with_entry

    plan = plan_with(DEFAULT_PLAN, CERTAIN | {"losses.three_body": "1e-28 cm^6/s"})
    other = plan_with_entry(plan, "species.key", "23Na")
    assert other.losses.three_body is None
    assert other.losses.background_lifetime == plan.losses.background_lifetime
    assert other.species.state is None


# --- what the trap itself does ---

TRAPS = Path(__file__).resolve().parents[2] / "presets" / "traps"


def in_trap(name: str, **texts: str) -> CloudAnswer:
    plan = read_plan(TRAPS / f"{name}.toml")
    return cloud_answer(plan_with(plan, {path.replace("__", "."): text for path, text in texts.items()}))


def test_light_heats_as_it_scatters_and_a_typed_rate_takes_its_place() -> None:
    light, typed = in_trap("crossed_beams_rubidium"), in_trap("crossed_beams_rubidium", losses__heating="20 nK/s")
    found = trap_answer(light.plan).survey.heating
    assert light.value("scattering_rate") == found.scattering_rate
    assert light.value("light_heating_rate") == pytest.approx(found.heating_rate, rel=1e-12)
    # Grimm, Weidemueller, Ovchinnikov, Adv. At. Mol. Opt. Phys. 42, 95 (2000): dT/dt = T_rec Gamma/3 in a harmonic
    # trap; T_rec of 87Rb at 1064 nm is 194.6 nK
    assert found.heating_rate == pytest.approx(194.6e-9 * found.scattering_rate / 3.0, rel=2e-3)
    loss = float(light.value("loss_heating_rate"))
    assert light.value("heating_rate") == pytest.approx(loss + found.heating_rate, rel=1e-12)
    assert typed.value("heating_rate") == pytest.approx(loss + 20e-9, rel=1e-12)
    assert typed.missing(QUANTITIES["light_heating_rate"]) is Need.LIGHT_HEATING
    assert typed.missing(QUANTITIES["scattering_rate"]) is None
    assert answer().missing(QUANTITIES["scattering_rate"]) is Need.LIGHT


def test_noise_of_the_light_does_nothing_to_a_trap_of_coils() -> None:
    beams = in_trap("crossed_beams_rubidium", losses__intensity_noise="1e-10 1/Hz")
    coils = in_trap("ioffe_coils_rubidium", losses__intensity_noise="1e-10 1/Hz")
    assert beams.solution.rates.noise_heating_rate > 0.0
    assert coils.solution.rates.noise_heating_rate == pytest.approx(0.0, abs=1e-30)
    shaken = in_trap("ioffe_coils_rubidium", losses__pointing_noise="1e-3 nm^2/Hz")
    assert shaken.solution.rates.pointing_heating_rate > 0.0


@pytest.mark.parametrize("name", ["crossed_beams_rubidium", "hybrid_rubidium"])
def test_the_steps_to_the_heat_of_the_trap_lead_all_the_way(name: str) -> None:
    found = in_trap(name, losses__intensity_noise="1e-10 1/Hz", losses__pointing_noise="1e-3 nm^2/Hz")
    for quantity in ("scattering_rate", "light_heating_rate"):
        steps = explain(found, quantity)
        assert steps.complete
        assert not disagreeing(steps)
        assert steps.value == pytest.approx(float(found.value(quantity)), rel=1e-12)
    steps = explain(found, "heating_rate")
    parts = {step.symbol: step for step in steps.steps if step.symbol in ("Ṫ_light", "Ṫ_noise", "Ṫ_pointing")}
    rates = found.solution.rates
    expected = rates.light_heating_rate, rates.noise_heating_rate, rates.pointing_heating_rate
    assert [step.value for step in parts.values()] == pytest.approx([float(rate) for rate in expected], rel=1e-9)
    assert all(step.agrees for step in parts.values())
