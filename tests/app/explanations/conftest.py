"""Clouds of every sort, whose numbers are explained."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from pathlib import Path
from types import MappingProxyType

import pytest

from app.engine import CloudAnswer, cloud_answer
from app.plan import plan_with, read_plan

ROOT = Path(__file__).resolve().parents[3]
RUBIDIUM = read_plan(ROOT / "presets" / "plans" / "crossed_trap_rubidium.toml")

LOSSES = {
    "losses.background_lifetime": "60 s",
    "losses.two_body": "1.0e-15 cm^3/s",
    "losses.three_body": "4.3e-29 cm^6/s",
    "losses.heating": "5 nK/s",
    "losses.intensity_noise": "1e-10 1/Hz",
}
SMALL = {"cloud.atoms": "2000", "trap.frequencies": "200 Hz, 250 Hz, 100 Hz"}
FERMIONS = {"species.key": "6Li", "species.scattering_length": "-300 a0", "species.spin_components": "2"}
PLANS: dict[str, dict[str, str]] = {
    "thermal, ideal": {"cloud.model": "ideal"},
    "thermal, semi-ideal": {},
    "thermal, exact levels": {**SMALL, "cloud.temperature": "90 nK", "cloud.model": "exact levels"},
    "thermal, classical": {"cloud.temperature": "40 µK"},
    "condensed, ideal": {"cloud.temperature": "80 nK", "cloud.model": "ideal"},
    "condensed, semi-ideal": {"cloud.temperature": "80 nK"},
    "condensed, thin": {"cloud.temperature": "138 nK", "species.scattering_length": "2000 a0"},
    "thermal, losses": LOSSES,
    "condensed, ideal, losses": {**LOSSES, "cloud.temperature": "80 nK", "cloud.model": "ideal"},
    "condensed, semi-ideal, losses": {**LOSSES, "cloud.temperature": "80 nK"},
    "condensed, exact levels, losses": {**LOSSES, **SMALL, "cloud.temperature": "30 nK", "cloud.model": "exact levels"},
    "fermions, losses": {**FERMIONS, **LOSSES},
    "condensed, pure": {"cloud.atoms": "1e7", "cloud.temperature": "20 nK"},
    "condensed, exact levels": {**SMALL, "cloud.temperature": "30 nK", "cloud.model": "exact levels"},
    "thermal, mean field": {**LOSSES, "cloud.model": "Hartree-Fock"},
    "condensed, mean field": {**LOSSES, "cloud.temperature": "80 nK", "cloud.model": "Hartree-Fock"},
    "condensed, mean field, strong": {
        "cloud.temperature": "100 nK",
        "species.scattering_length": "2000 a0",
        "cloud.model": "Hartree-Fock",
    },
    "fermions, exact levels": {
        **SMALL,
        **FERMIONS,
        **LOSSES,
        "cloud.atoms": "300",
        "cloud.temperature": "15 nK",
        "cloud.model": "exact levels",
    },
    "condensed, attractive": {
        **SMALL,
        "species.key": "7Li",
        "species.scattering_length": "-5 a0",
        "cloud.atoms": "800",
        "cloud.temperature": "20 nK",
    },
    "condensed, without interaction": {"cloud.temperature": "80 nK", "species.scattering_length": "0 a0"},
    "condensed, dipoles": {"species.key": "164Dy", "cloud.temperature": "50 nK"},
    "attractive": {"species.key": "7Li", "species.scattering_length": "-27 a0"},
    "length unknown": {"species.key": "85Rb"},
    "tuned by a field": {"species.key": "133Cs", "species.field": "21 G", "cloud.temperature": "20 nK"},
    "two boson states": {"species.spin_components": "2"},
    "fermions, hot": {**FERMIONS, "cloud.temperature": "2 µK"},
    "fermions, cold": {**FERMIONS, "cloud.temperature": "60 nK", "target.reduced_temperature": "0.2"},
    "fermions, paired": {**FERMIONS, "species.scattering_length": "3000 a0"},
    "fermions, unitary": {**FERMIONS, "species.scattering_length": "1e6 a0"},
    "fermions, one spin state": {"species.key": "40K", "species.spin_components": "1"},
}
"""Changes to a plan with 87Rb at 200 nK, Tc 138 nK, for each sort of cloud."""


Answered = Callable[..., CloudAnswer]


def _answered(name: str = "thermal, semi-ideal", changes: Mapping[str, str] = MappingProxyType({})) -> CloudAnswer:
    return cloud_answer(plan_with(RUBIDIUM, {**PLANS[name], **changes}))


@pytest.fixture(params=PLANS, scope="module")
def answer(request: pytest.FixtureRequest) -> CloudAnswer:
    """The answer for each cloud in turn."""
    return _answered(request.param)


@pytest.fixture(scope="session")
def answered() -> Answered:
    """answered(name, {"cloud.temperature": "80 nK"}) is the answer for a cloud by its name, with changes."""
    return _answered


@pytest.fixture(scope="session")
def clouds() -> tuple[str, ...]:
    """The names of all clouds."""
    return tuple(PLANS)
