"""The worker that runs the newest request only."""

from __future__ import annotations

import threading

from app.newest import Newest


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
