"""A ramp of four stages, and searches for a better one that are short."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from app.plan import Plan, read_plan
from app.process import own_process

DATA = Path(__file__).parents[2] / "data"


@pytest.fixture(scope="module")
def plan() -> Plan:
    """Four stages in a harmonic trap, and clouds measured on the way."""
    return read_plan(DATA / "plan_of_four_stages.toml")


@pytest.fixture(scope="module", autouse=True)
def _no_process_is_left() -> Iterator[None]:
    yield
    own_process.close()
    assert not own_process.running


@pytest.fixture
def quick_designs(monkeypatch: pytest.MonkeyPatch) -> None:
    """A search that looks at few truncation parameters; what it finds is worked out as always."""
    monkeypatch.setattr("physics.ramp_design._SCAN", 5)
    monkeypatch.setattr("physics.ramp_design._REFINE", 4)
    monkeypatch.setattr("physics.ramp_design._DRIFTS", ())
