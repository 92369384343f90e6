"""Work for plans that come faster than it is done: one at a time, and the newest follows."""

import pytest

from app.widgets import pace
from app.widgets.pace import Pace


def test_one_thing_at_a_time_and_the_newest_follows():
    one = Pace()
    assert one.begin()
    assert not one.begin()
    assert not one.begin()
    assert one.arrived()
    assert one.begin()
    assert not one.arrived()


def test_work_that_never_comes_back_does_not_hold_up_for_ever(monkeypatch: pytest.MonkeyPatch):
    now = [100.0]
    monkeypatch.setattr(pace.time, "monotonic", lambda: now[0])
    one = Pace()
    assert one.begin()
    now[0] += 0.5 * pace.PATIENCE
    assert not one.begin()
    now[0] += 0.6 * pace.PATIENCE
    assert one.begin()
