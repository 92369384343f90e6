"""The picture of rates and the answer behind it: the same numbers as the cloud's, on one axis, and what limits."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from app.engine import Against, RatesAnswer, cloud_answer, rates_answer
from app.figures.picture import Picture, Role
from app.figures.rates import limits_sentence, rates_picture
from app.plan import DEFAULT_PLAN, Plan, plan_with, read_plan

LOSSY = plan_with(
    DEFAULT_PLAN,
    {
        "losses.background_lifetime": "60 s",
        "losses.two_body": "1e-15 cm^3/s",
        "losses.three_body": "4e-29 cm^6/s",
        "losses.heating": "2 nK/s",
    },
)
HELIUM = plan_with(
    LOSSY,
    {
        "species.key": "4He_metastable",
        "cloud.atoms": "1e6",
        "cloud.temperature": "2 µK",
        "trap.frequencies": "1 kHz, 1 kHz, 100 Hz",
    },
)


def curve(picture: Picture, role: Role) -> tuple[np.ndarray, np.ndarray]:
    found = next(c for c in picture.curves if c.role is role)
    return found.x, found.y


@pytest.mark.parametrize("against", list(Against))
@pytest.mark.parametrize("model", ["ideal", "semi-ideal", "Hartree-Fock", "exact levels"])
def test_the_rates_pass_through_those_of_the_cloud(model: str, against: Against) -> None:
    plan = plan_with(LOSSY, {"cloud.model": model})
    answer, cloud = rates_answer(plan, against), cloud_answer(plan)
    names = {
        "rethermalisation": "rethermalisation_time",
        "background": "background_lifetime",
        "two_body": "two_body_lifetime",
        "three_body": "three_body_lifetime",
        "losses": "total_lifetime",
    }
    for name, lifetime in names.items():
        now = float(getattr(answer.now, name))
        assert now == pytest.approx(1.0 / float(cloud.value(lifetime)), rel=1e-12)
        along = np.interp(np.log(answer.place), np.log(answer.grid), np.log(getattr(answer.rates, name)))
        assert np.exp(along) == pytest.approx(now, rel=2e-2)
    assert float(answer.now.elastic) == pytest.approx(2.7 * float(answer.now.rethermalisation), rel=1e-12)
    assert answer.now.heating == pytest.approx(float(cloud.value("heating_rate")) / 2e-7, rel=1e-12)


def test_the_answer_follows_the_losses_of_the_plan() -> None:
    faster = plan_with(LOSSY, {"losses.background_lifetime": "6 s"})
    assert rates_answer(LOSSY, Against.ATOMS) is rates_answer(LOSSY, Against.ATOMS)
    assert float(rates_answer(faster, Against.ATOMS).now.background) == pytest.approx(1.0 / 6.0)


@pytest.mark.parametrize("plan", [LOSSY, HELIUM], ids=["rubidium", "helium"])
@pytest.mark.parametrize("against", list(Against))
def test_all_rates_stand_on_one_logarithmic_axis(plan: Plan, against: Against) -> None:
    answer = rates_answer(plan, against)
    picture = rates_picture(answer)
    assert picture.y.log
    assert picture.y.unit == "1/s"
    names = [c.name for c in picture.curves if c.name]
    assert len(set(names)) == len(names) == 6
    for c in picture.curves:
        finite = c.y[np.isfinite(c.y)]
        assert np.all(finite > 0.0)
        assert finite.max() <= picture.y.high
    assert picture.y.high / picture.y.low <= 1.001e9
    # The sum of the losses is nowhere below any of them.
    _, total = curve(picture, Role.TOTAL)
    for role in (Role.SECOND, Role.THIRD, Role.FOURTH):
        assert np.all(curve(picture, role)[1] <= total * (1.0 + 1e-12))
    marks = [(mark.x, mark.y) for mark in picture.marks]
    assert marks == [
        (answer.place, float(answer.now.rethermalisation)), (answer.place, float(answer.now.losses)),
    ]  # fmt: skip
    upright, _ = curve(picture, Role.CLOUD)
    assert np.all(upright == answer.place)


def test_the_threshold_is_where_the_cloud_would_condense() -> None:
    answer = rates_answer(LOSSY, Against.TEMPERATURE)
    critical = float(cloud_answer(LOSSY).equilibrium.critical_temperature)
    assert answer.threshold == pytest.approx(critical, rel=1e-12)
    picture = rates_picture(answer)
    assert [label.x for label in picture.labels] == [answer.threshold]
    # Losses rise faster below it than above: the condensate is denser.
    grid, three = answer.grid, answer.rates.three_body
    assert np.all(np.diff(three[grid < critical]) < 0.0)


@pytest.mark.parametrize(
    ("texts", "sentence"),
    [
        (
            {"losses.two_body": "0 cm^3/s"},
            r"^Loss by background gas limits the lifetime to 60\.0 s, all known losses together to 59\.\d s\. Atoms "
            r"rethermalise in 1\d\d ms",
        ),
        (
            {"losses.three_body": "1e-25 cm^6/s"},
            r"^Loss by three-body collisions limits the lifetime to 1\.\d\d s, all known",
        ),
        (
            {"losses.two_body": "1e-12 cm^3/s"},
            r"^Loss by two-body collisions limits the lifetime to 49\d ms, all known losses",
        ),
        (
            {"species.key": "41K", "losses.two_body": "", "losses.three_body": ""},
            r"^Loss by background gas limits the lifetime to 60\.0 s; no other is known\. Atoms rethermalise",
        ),
        (
            {"species.key": "41K", "losses.background_lifetime": "", "losses.two_body": "", "losses.three_body": ""},
            r"^No loss is known; atoms rethermalise in",
        ),
        (
            {"species.key": "3He_metastable", "losses.background_lifetime": "", "losses.two_body": ""},
            r"^Neither losses nor collisions are known\.$",
        ),
        (
            {"species.key": "3He_metastable"},
            r"^Loss by background gas limits the lifetime to 60\.0 s; no other is known\.$",
        ),
    ],
)
def test_what_limits_is_said_in_a_sentence(texts: dict[str, str], sentence: str) -> None:
    import re

    answer = rates_answer(plan_with(LOSSY, texts), Against.ATOMS)
    said = limits_sentence(answer.now)
    assert re.search(sentence, said), said
    assert rates_picture(answer).summary == said


def test_a_cloud_of_which_nothing_is_known_says_so() -> None:
    plan = plan_with(LOSSY, {"species.key": "3He_metastable", "losses.background_lifetime": "", "losses.heating": ""})
    picture = rates_picture(rates_answer(plan, Against.TEMPERATURE))
    assert picture.note.startswith("no rate is known")
    assert not picture.marks


def test_one_loss_alone_is_not_drawn_twice() -> None:
    plan = plan_with(LOSSY, {"species.key": "41K", "losses.heating": ""})
    names = [c.name for c in rates_picture(rates_answer(plan, Against.ATOMS)).curves]
    assert "background loss" in names
    assert "all known losses" not in names


def test_a_picture_needs_no_arrays_that_can_be_written() -> None:
    answer: RatesAnswer = rates_answer(LOSSY, Against.ATOMS)
    assert not answer.rates.background.flags.writeable


def test_heating_of_which_only_light_is_known_is_drawn_as_that() -> None:
    held = Path(__file__).resolve().parents[3] / "presets" / "plans" / "evaporation_crossed_beams.toml"
    answer = rates_answer(read_plan(held), Against.TEMPERATURE)
    drawn = {curve.name: curve for curve in rates_picture(answer).curves}
    whole, light = drawn["heating, dT/dt over T"], drawn["heating by the trap's light"]
    condensed = whole.x < answer.threshold
    assert condensed.any()
    assert np.isnan(whole.y[condensed]).all()
    assert np.isfinite(light.y[condensed]).all()
    assert np.isfinite(whole.y[~condensed]).any()
