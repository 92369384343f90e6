"""Kills at random moments: the plan file is whole, and the next start offers the unsaved changes."""

from __future__ import annotations

import json
import os
import random
import shutil
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import pytest

from app.plan import read_plan

LONG = os.environ.get("COLDWARD_LONG") == "1"
KILLS = 50 if LONG else 1
SEED = 20_270_115
ROOT = Path(__file__).resolve().parents[2]
SCRIPT = Path(__file__).with_name("window_to_be_killed.py")
PLAN = ROOT / "presets" / "plans" / "crossed_trap_rubidium.toml"
LATE = 1.5  # s by which a copy of an edit must be there, many times what the script asks for


def start(*arguments: object) -> subprocess.Popen[str]:
    return subprocess.Popen(
        [sys.executable, str(SCRIPT), *map(str, arguments)],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        env={**os.environ, "PYTHONPATH": str(ROOT), "QT_QPA_PLATFORM": "offscreen"},
    )


def edit_until_killed(plan: Path, settings: Path, number: int) -> list[tuple[float, dict[str, Any]]]:
    """What the window said it did, each with the time it was heard, up to the kill."""
    chance = random.Random(f"{SEED}/{number}")
    process = start("edit", plan, settings, f"{SEED}/{number}")
    said: list[tuple[float, dict[str, Any]]] = []
    assert process.stdout is not None
    line = process.stdout.readline()
    assert line, process.stderr.read() if process.stderr else ""
    end = time.monotonic() + chance.uniform(0.05, 3.0)
    while line:
        said.append((time.monotonic(), json.loads(line)))
        if time.monotonic() >= end:
            break
        line = process.stdout.readline()
    process.send_signal(signal.SIGKILL)
    rest, _ = process.communicate()
    said += [(time.monotonic(), json.loads(text)) for text in rest.splitlines() if text.endswith("}")]
    assert process.returncode == -signal.SIGKILL
    return said


def look(plan: Path, settings: Path) -> dict[str, Any]:
    done = start("look", plan, settings)
    out, err = done.communicate(timeout=60)
    assert done.returncode == 0, err
    return json.loads(out.splitlines()[-1])  # type: ignore[no-any-return]


@pytest.mark.long
@pytest.mark.timeout(180)
@pytest.mark.parametrize("number", range(KILLS))
def test_a_kill_loses_no_work(number: int, tmp_path: Path) -> None:
    plan, settings = tmp_path / "plan.toml", tmp_path / "settings"
    shutil.copyfile(PLAN, plan)
    said = edit_until_killed(plan, settings, number)
    killed = said[-1][0]
    # The file is whole: what it held at first, or what was being saved.
    saved = [fact.get("saving", fact.get("saved")) for _, fact in said if "saving" in fact or "saved" in fact]
    title = read_plan(plan).title
    allowed = saved[-2:] if saved else [read_plan(PLAN).title]
    assert title in allowed
    rest = plan.read_text(encoding="utf-8").split("\n", 3)[3]
    assert rest == PLAN.read_text(encoding="utf-8").split("\n", 3)[3]
    assert [path for path in tmp_path.iterdir() if path.suffix == ".toml"] == [plan]
    # The copy is offered whenever there was time to make one, and it holds an edit not much older than the kill.
    found = look(plan, settings)
    assert found["opened"] == title
    edits = [(when, fact["edit"]) for when, fact in said if "edit" in fact]
    clean_since = max((when for when, fact in said if "saved" in fact), default=0.0)
    old = [text for when, text in edits if clean_since < when < killed - LATE]
    if old:
        assert "a copy of it was kept" in found["told"]
    if found["recovered"] != title:
        texts = [text for _, text in edits]
        assert found["unsaved"]
        assert found["recovered"] in texts
        if old:
            assert texts.index(found["recovered"]) >= texts.index(old[-1])
    # Once opened, it is not offered again.
    assert look(plan, settings)["told"] == ""
