"""The process of its own: results, errors, stops, and its end."""

from __future__ import annotations

import importlib
import multiprocessing
import os
import subprocess
import sys
import threading
import time
from collections.abc import Iterator
from pathlib import Path
from types import MappingProxyType, ModuleType

import pytest

from app.plan_field import PlanError
from app.process import OwnProcess, ProcessLost, Stopped

ROOT = Path(__file__).resolve().parents[2]
TASKS = """
import os, time
from types import MappingProxyType

from app.plan_field import PlanError


def where():
    return os.getpid()


def turned(mapping):
    return MappingProxyType({value: key for key, value in mapping.items()})


def counted(count, tick):
    for step in range(count):
        if not tick(step / count):
            return "told to stop"
        time.sleep(0.002)
    return count


def refused():
    raise PlanError("the trap holds nothing", path="trap.depth")


class Odd(Exception):
    def __init__(self, one, two):
        super().__init__(one)


def odd():
    raise Odd("odd", 2)


def unsendable():
    return lambda: None


def left():
    os._exit(3)


def stubborn(tick):
    time.sleep(60)
"""


@pytest.fixture(scope="module")
def process() -> Iterator[OwnProcess]:
    with OwnProcess() as made:
        yield made
    assert not made.running
    assert multiprocessing.active_children() == []


@pytest.fixture(scope="module")
def tasks(tmp_path_factory: pytest.TempPathFactory) -> Iterator[ModuleType]:
    """Functions of a module that both processes can import."""
    folder = tmp_path_factory.mktemp("tasks")
    (folder / "tasks_of_a_test.py").write_text(TASKS, encoding="utf-8")
    sys.path.insert(0, str(folder))
    yield importlib.import_module("tasks_of_a_test")
    sys.path.remove(str(folder))
    del sys.modules["tasks_of_a_test"]


def test_it_starts_when_first_asked_and_stays(process: OwnProcess, tasks: ModuleType) -> None:
    assert not OwnProcess().running
    first = process.run(tasks.where)
    assert first != os.getpid()
    assert process.run(tasks.where) == first
    assert process.running


def test_read_only_mappings_go_through(process: OwnProcess, tasks: ModuleType) -> None:
    found = process.run(tasks.turned, (MappingProxyType({"a": 1}),))
    assert found == {1: "a"}
    assert isinstance(found, MappingProxyType)


def test_it_tells_how_far_it_is_and_stops(process: OwnProcess, tasks: ModuleType) -> None:
    told: list[float] = []
    assert process.run(tasks.counted, (50,), lambda share: told.append(share) is None) == 50
    assert told == sorted(told)
    assert told[-1] == pytest.approx(0.98)
    same = process.run(tasks.where)
    with pytest.raises(Stopped):
        process.run(tasks.counted, (10_000,), lambda share: share < 0.002)
    assert process.run(tasks.where) == same  # stopped by itself: the process is still the one


def test_errors_come_back_as_they_are(process: OwnProcess, tasks: ModuleType) -> None:
    with pytest.raises(PlanError, match="the trap holds nothing") as caught:
        process.run(tasks.refused)
    assert caught.value.path == "trap.depth"
    with pytest.raises(RuntimeError, match="Odd: odd"):
        process.run(tasks.odd)
    with pytest.raises(RuntimeError, match="pickle"):
        process.run(tasks.unsendable)


def test_a_process_that_ends_is_followed_by_another(process: OwnProcess, tasks: ModuleType) -> None:
    first = process.run(tasks.where)
    with pytest.raises(ProcessLost, match="try again"):
        process.run(tasks.left)
    assert process.run(tasks.where) != first


def test_a_task_that_does_not_listen_ends_with_its_process(
    process: OwnProcess, tasks: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("app.process.PATIENCE", 0.1)
    first = process.run(tasks.where)
    with pytest.raises(Stopped):
        process.run(tasks.stubborn, (), lambda _share: False)
    assert process.run(tasks.where) != first


def test_closing_stops_what_runs_and_it_may_start_again(process: OwnProcess, tasks: ModuleType) -> None:
    begun, ended = threading.Event(), threading.Event()

    def tick(_share: float) -> bool:
        begun.set()
        return True

    def work() -> None:
        try:
            process.run(tasks.stubborn, (), tick)
        except Stopped:
            ended.set()

    thread = threading.Thread(target=work)
    thread.start()
    assert begun.wait(30.0)
    process.close()
    thread.join(10.0)
    assert ended.is_set()
    assert not process.running
    assert process.run(tasks.where) != os.getpid()


def test_it_ends_with_the_program_that_does_not_close_it(tmp_path: Path) -> None:
    """From a script with a main guard, as the entry point is."""
    script = tmp_path / "program"
    script.write_text(
        "import os\nfrom app.process import own_process\n"
        "if __name__ == '__main__':\n    print(own_process.run(os.getpid), flush=True)\n",
        encoding="utf-8",
    )
    done = subprocess.run(
        [sys.executable, str(script)], capture_output=True, text=True, timeout=60, check=True, cwd=ROOT,
        env=os.environ | {"PYTHONPATH": str(ROOT)},
    )  # fmt: skip
    assert done.stderr == ""
    pid = int(done.stdout)
    for _ in range(100):
        if not _alive(pid):
            return
        time.sleep(0.05)
    pytest.fail("the process outlives its program")


def _alive(pid: int) -> bool:
    try:
        os.kill(pid, 0)
    except OSError:
        return False
    return True
