"""A cloud checks itself; equilibrium picks the model that holds, and says why another does not."""

from __future__ import annotations

import math
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from physics.cloud import AVAILABLE_MODELS, Cloud, Equilibrium, Model, Replacement, equilibrium
from physics.particles import Statistics
from physics.traps import HarmonicTrap

Maker = Callable[..., Equilibrium]

TRAP = HarmonicTrap(frequencies=[100.0, 100.0, 10.0])
FERMI = {"statistics": Statistics.FERMI}


def cloud(**given: Any) -> Cloud:
    plain = {"statistics": Statistics.BOSE, "mass": 1.4e-25, "trap": TRAP, "atoms": 1e5, "temperature": 1e-7}
    return Cloud(**{**plain, **given})


@pytest.mark.parametrize(
    ("given", "sentence"),
    [
        ({"temperature": 0.0}, r"^temperature must be positive and finite, got 0 K$"),
        ({"temperature": [1e-7, -1e-8]}, r"^temperature must be positive and finite, got -1e-08 K$"),
        ({"atoms": 0}, r"^atom number must be positive and finite, got 0$"),
        ({"atoms": math.inf}, r"^atom number must be positive and finite, got inf$"),
        ({"mass": -1.0}, r"^mass must be positive and finite, got -1 kg$"),
        ({"mass": [1e-25, 2e-25]}, r"^mass must be one number, got an array of shape \(2,\)$"),
        ({"spin_components": 0}, r"^spin components must be a whole number from 1 on, got 0$"),
        ({"spin_components": 1.5}, r"^spin components must be a whole number from 1 on, got 1.5$"),
        ({"scattering_length": -math.inf}, r"^scattering length must be finite, got -inf m$"),
        (
            {"atoms": [1e4, 1e5], "temperature": [1e-7] * 3},
            r"must broadcast, got shapes atoms \(2,\), temperature \(3,\)",
        ),
    ],
)
def test_impossible_values_are_refused_in_one_sentence(given: dict[str, Any], sentence: str) -> None:
    with pytest.raises(ValueError, match=sentence):
        cloud(**given)


def test_shape_is_that_of_everything_broadcast_together() -> None:
    trap = HarmonicTrap(frequencies=np.full((2, 1, 1, 3), 100.0))
    assert cloud().shape == ()
    assert cloud(trap=trap, atoms=np.full((3, 1), 1e4), temperature=np.full(4, 1e-7)).shape == (2, 3, 4)
    assert cloud(scattering_length=np.full(6, 1e-9)).shape == (6,)


def test_defaults_are_semi_ideal_for_bosons_and_ideal_for_fermions(bosons: Maker, fermions: Maker) -> None:
    assert (bosons().model, bosons().replaced) == (Model.SEMI_IDEAL, None)
    assert (fermions().model, fermions().replaced) == (Model.IDEAL, None)


@pytest.mark.parametrize(
    ("model", "given", "reason"),
    [
        (None, {"scattering_length": None}, Replacement.LENGTH_UNKNOWN),
        (Model.SEMI_IDEAL, {"scattering_length": [1e-9, math.nan]}, Replacement.LENGTH_UNKNOWN),
        (Model.SEMI_IDEAL, {"scattering_length": 0.0}, Replacement.NOT_REPULSIVE),
        (Model.SEMI_IDEAL, {"scattering_length": [1e-9, -1e-9]}, Replacement.NOT_REPULSIVE),
        (Model.HARTREE_FOCK, {"scattering_length": None}, Replacement.LENGTH_UNKNOWN),
        (Model.HARTREE_FOCK, {"scattering_length": 0.0}, Replacement.NOT_REPULSIVE),
        (Model.HARTREE_FOCK, {"scattering_length": -1e-9}, Replacement.NOT_REPULSIVE),
        (Model.SEMI_IDEAL, FERMI, Replacement.BOSONS_ONLY),
        (Model.HARTREE_FOCK, FERMI, Replacement.BOSONS_ONLY),
    ],
)
def test_a_model_that_cannot_hold_gives_way_to_the_ideal_one(
    bosons: Maker, model: Model | None, given: dict[str, Any], reason: Replacement
) -> None:
    solved = bosons(model, **given)
    assert (solved.model, solved.replaced) == (Model.IDEAL, reason)
    ideal = bosons(Model.IDEAL, **given)
    assert ideal.replaced is None
    np.testing.assert_array_equal(solved.peak_density, ideal.peak_density)


@pytest.mark.parametrize("model", AVAILABLE_MODELS)
def test_a_model_that_holds_is_used(bosons: Maker, model: Model) -> None:
    solved = bosons(model)
    assert (solved.model, solved.replaced) == (model, None)


def test_threshold_and_efficiency_must_be_positive() -> None:
    with pytest.raises(ValueError, match=r"^threshold T/TF must be positive and finite, got 0$"):
        equilibrium(cloud(), fermi_threshold=0.0)
    with pytest.raises(ValueError, match=r"^evaporation efficiency must be positive and finite, got -2$"):
        equilibrium(cloud(), efficiency=-2.0)


def test_a_whole_answer_loads_no_scipy() -> None:
    # Loading it would take longer than the answer; the command line answers by itself in a fraction of that time.
    program = """
import sys
from physics.caveats import caveats_of
from physics.cloud import AVAILABLE_MODELS, Cloud, equilibrium
from physics.particles import Statistics
from physics.profiles import column_density_profile
from physics.traps import HarmonicTrap
for statistics in Statistics:
    for model in AVAILABLE_MODELS:
        trap = HarmonicTrap(frequencies=(120.0, 90.0, 20.0), depth=1e-29)
        cloud = Cloud(statistics=statistics, mass=1.4e-25, trap=trap, atoms=1e5, temperature=5e-8,
                      scattering_length=5e-9, spin_components=2)
        solved = equilibrium(cloud, model, efficiency=2.0)
        for name in dir(solved):
            getattr(solved, name)
        caveats_of(solved)
        column_density_profile(solved, 0, [0.0], 1)
loaded = {name.split(".")[0] for name in sys.modules} & {"scipy", "matplotlib", "pint"}
sys.exit(", ".join(loaded) or None)
"""
    subprocess.run([sys.executable, "-c", program], check=True, cwd=Path(__file__).parents[2])
