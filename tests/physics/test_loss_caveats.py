"""Each caveat of losses: one cloud that raises it, with its number, and one that does not."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import pytest

from physics.caveats import Caveat, Severity
from physics.cloud import Equilibrium, Model
from physics.constants import bohr_radius, boltzmann, reduced_planck
from physics.loss_caveats import loss_caveats
from physics.losses import Losses, scaling_ceiling, unitary_ceiling
from physics.particles import Certainty
from physics.rates import Rates

Maker = Callable[..., Equilibrium]

GIVEN = {"background_lifetime": 60.0, "three_body": 4e-41}


def found(solved: Equilibrium, losses: dict[str, float] = GIVEN, **more: Any) -> dict[str, Caveat]:
    return {c.id: c for c in loss_caveats(Rates(equilibrium=solved, losses=Losses(**losses)), **more)}


def test_a_plain_cloud_with_known_losses_raises_none(bosons: Maker, fermions: Maker) -> None:
    assert found(bosons()) == {}
    assert found(fermions(spin_components=2, scattering_length=1e-8), {"background_lifetime": 60.0}) == {}


def test_what_is_not_given_is_noted(bosons: Maker, fermions: Maker) -> None:
    assert set(found(bosons(), {})) == {"no_background", "three_body_unknown"}
    assert set(found(bosons(), {"background_lifetime": 60.0})) == {"three_body_unknown"}
    # One state of fermions has no three-body loss by s-waves that one would miss.
    assert set(found(fermions(), {})) == {"no_background"}
    assert all(caveat.severity is Severity.NOTE for caveat in found(bosons(), {}).values())


def test_of_losses_that_do_not_count_nothing_is_said(bosons: Maker) -> None:
    thin = bosons(atoms=2e3, temperature=4e-6)
    density = float(Rates(equilibrium=thin, losses=Losses()).triple_density)
    assert "three_body_unknown" not in found(thin, {"background_lifetime": 0.01 / (1e-39 * density)})
    assert "three_body_unknown" in found(thin, {"background_lifetime": 0.03 / (1e-39 * density)})
    for share, noted in ((0.01, False), (0.03, True)):
        losses = {"background_lifetime": share / (4e-41 * density), "three_body": 4e-41}
        caveats = found(thin, losses, certainties={"three_body": Certainty.MEMORY})
        assert ("three_body_recalled" in caveats) is noted


@pytest.mark.parametrize(("name", "value"), [("two_body", 1e-20), ("three_body", 4e-40)])
def test_recalled_constants_are_noted_and_seen_ones_not(bosons: Maker, name: str, value: float) -> None:
    losses = {**GIVEN, name: value}
    recalled = found(bosons(), losses, certainties={name: Certainty.MEMORY})
    assert recalled[f"{name}_recalled"].value == value
    assert f"{name}_recalled" not in found(bosons(), losses, certainties={name: Certainty.SEEN})
    assert f"{name}_recalled" not in found(bosons(), losses)


def test_losses_faster_than_rethermalisation(bosons: Maker) -> None:
    slow, few, fast = bosons(), bosons(atoms=2e4, temperature=4e-6), bosons(atoms=2e3, temperature=4e-6)
    assert "loss_fast" not in found(slow)
    for solved, severity in ((few, Severity.NOTE), (fast, Severity.WARNING)):
        rates = Rates(equilibrium=solved, losses=Losses(**GIVEN))
        caveat = found(solved)["loss_fast"]
        assert caveat.value == pytest.approx(float(rates.rethermalisation_time / rates.total_lifetime), rel=1e-12)
        assert caveat.severity is severity


def test_heating_faster_than_rethermalisation(bosons: Maker) -> None:
    time = float(Rates(equilibrium=bosons()).rethermalisation_time)
    for share, severity in ((0.05, None), (0.5, Severity.NOTE), (2.0, Severity.WARNING)):
        caveat = found(bosons(), {**GIVEN, "heating": share * 2e-7 / time}).get("heating_fast")
        assert (caveat.severity if caveat else None) is severity
        if caveat:
            assert caveat.value == pytest.approx(share, rel=1e-2)  # losses heat or cool a little, too


def test_three_body_loss_above_its_ceilings(bosons: Maker) -> None:
    solved = bosons()
    scaling = float(scaling_ceiling(solved.cloud.mass, 100.0 * bohr_radius))
    caveat = found(solved, {**GIVEN, "three_body": 2.0 * scaling})["three_body_scaling"]
    assert caveat.value == pytest.approx(2.0, rel=1e-12)
    assert caveat.severity is Severity.WARNING
    assert "three_body_scaling" not in found(solved, {**GIVEN, "three_body": 0.9 * scaling})
    unitary = float(unitary_ceiling(solved.cloud.mass, 2e-7))
    assert found(solved, {**GIVEN, "three_body": 3.0 * unitary})["three_body_unitarity"].value == pytest.approx(3.0)
    assert "three_body_unitarity" not in found(solved, {**GIVEN, "three_body": 0.9 * unitary})


def test_three_body_constant_measured_at_another_length(bosons: Maker) -> None:
    solved = bosons()  # 100 a0
    assert "three_body_elsewhere" not in found(solved, measured_length=95.0 * bohr_radius)
    assert "three_body_elsewhere" not in found(solved)
    assert found(solved, measured_length=50.0 * bohr_radius)["three_body_elsewhere"].value == pytest.approx(16.0)
    assert found(solved, measured_length=-200.0 * bohr_radius)["three_body_elsewhere"].value == pytest.approx(1 / 16)


def test_a_condensate_without_repulsion_is_too_dense_to_reckon_losses(bosons: Maker) -> None:
    for model in (Model.IDEAL, Model.EXACT_LEVELS):
        solved = bosons(model, temperature=6e-8)
        assert found(solved)["loss_ideal_condensate"].value == pytest.approx(float(solved.peak_density))
        assert "loss_ideal_condensate" not in found(bosons(model))
        assert "loss_ideal_condensate" not in found(solved, {"background_lifetime": 60.0})
    assert "loss_ideal_condensate" not in found(bosons(Model.SEMI_IDEAL, temperature=6e-8))


def test_fast_dipoles(bosons: Maker) -> None:
    dipoles = 131.0 * bohr_radius  # dysprosium
    solved = bosons(dipolar_length=dipoles, temperature=8e-6)
    # k = m v/(2 hbar) at the mean relative speed sqrt(2) sqrt(8 kT/(pi m)); a_d = 1.5 a_dd.
    speed = math.sqrt(2.0) * math.sqrt(8.0 * boltzmann * 8e-6 / (math.pi * solved.cloud.mass))
    expected = solved.cloud.mass * speed / (2.0 * reduced_planck) * 1.5 * dipoles
    assert expected > 0.3
    assert found(solved)["dipolar_fast"].value == pytest.approx(expected, rel=1e-12)
    assert "dipolar_fast" not in found(bosons(dipolar_length=dipoles, temperature=2e-6))
