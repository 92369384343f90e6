"""The worker that runs the newest request only."""

from __future__ import annotations

import sys
import threading
import time

import pytest

from app.newest import BRIEF_TURN, Newest, Steps, Watch, brief_turns


def fail(error: Exception) -> None:
    raise AssertionError(error)


def test_the_newest_of_many_requests_is_the_one_delivered() -> None:
    worker, hold, done = Newest(), threading.Event(), threading.Event()
    results: list[int] = []

    def deliver(value: int) -> None:
        results.append(value)
        done.set()

    worker.ask(lambda: hold.wait(5), lambda _: results.append(-1), fail)
    while worker.started == 0:
        pass
    for value in range(100):
        worker.ask(lambda value=value: value, deliver, fail)
    hold.set()
    assert done.wait(5)
    worker.close()
    assert results == [99]
    assert worker.started == 2
    assert worker.dropped == 99
    assert worker.most_waiting == 1


def test_an_error_reaches_the_one_who_asked() -> None:
    worker, done = Newest(), threading.Event()
    errors: list[Exception] = []

    def failed(error: Exception) -> None:
        errors.append(error)
        done.set()

    def job() -> None:
        raise ValueError("no such trap")

    worker.ask(job, lambda _: None, failed)
    assert done.wait(5)
    worker.close()
    assert [str(error) for error in errors] == ["no such trap"]


def test_nothing_is_delivered_after_closing() -> None:
    worker, hold = Newest(), threading.Event()
    results: list[object] = []
    worker.ask(lambda: hold.wait(5), results.append, fail)
    while worker.started == 0:
        pass
    threading.Timer(0.05, hold.set).start()
    worker.close()
    worker.ask(lambda: 1, results.append, fail)
    assert results == []
    assert not worker.busy


# --- jobs in steps ---


def test_a_job_in_steps_hands_out_parts_and_tells_how_far_it_is() -> None:
    worker, done = Newest(), threading.Event()
    parts: list[object] = []
    shares: list[float] = []

    def run(watch: Watch) -> str:
        assert watch.deliver("draft")
        for share in (0.5, 1.0):
            assert watch.tell(share)
        return "whole"

    def deliver(result: object) -> None:
        parts.append(result)
        done.set()

    worker.ask(Steps("a map", 1, run), deliver, fail, part=parts.append, told=shares.append)
    assert done.wait(5)
    worker.close()
    assert parts == ["draft", "whole"]
    assert shares == [0.5, 1.0]


@pytest.mark.parametrize("overtake", [True, False], ids=["overtaken", "stopped"])
def test_a_job_in_steps_ends_at_its_next_step_when_nobody_wants_it(overtake: bool) -> None:
    worker, begun, ended, done = Newest(), threading.Event(), threading.Event(), threading.Event()
    results: list[object] = []

    def run(watch: Watch) -> object:
        begun.set()
        for _ in range(5000):
            if not watch.tell(0.1):
                ended.set()
                return None
            time.sleep(0.001)
        return "whole"

    worker.ask(Steps("a map", 1, run), results.append, fail, part=results.append)
    assert begun.wait(5)
    if overtake:
        worker.ask(lambda: done.set(), lambda _result: None, fail)
    else:
        worker.stop()
        done.set()
    assert ended.wait(5)
    assert done.wait(5)
    worker.close()
    assert results == []


def test_threads_take_turns_more_often_only_while_a_job_in_steps_runs() -> None:
    usual = sys.getswitchinterval()
    with brief_turns():
        assert sys.getswitchinterval() == pytest.approx(BRIEF_TURN)
    assert sys.getswitchinterval() == pytest.approx(usual)


def test_jobs_in_steps_are_the_same_where_they_depend_on_the_same() -> None:
    assert Steps("one", (1, 2), lambda _watch: None) == Steps("other", (1, 2), lambda _watch: 0)
    assert Steps("one", 1, print) != Steps("one", 2, print)
