"""What the README shows is what the program takes."""

from __future__ import annotations

import re
import shlex
from pathlib import Path

import pytest

from app.__main__ import build_parser
from app.plan import read_plan

ROOT = Path(__file__).parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")
PLANS = re.findall(r"^```toml\n(.*?)^```", README, flags=re.MULTILINE | re.DOTALL)
COMMANDS = re.findall(r"^    coldward (.+)$", README, flags=re.MULTILINE)


def test_the_plans_of_the_readme_are_plans(tmp_path: Path) -> None:
    file = tmp_path / "plan.toml"
    plans = []
    for text in PLANS:
        file.write_text(text, encoding="utf-8")
        plans.append(read_plan(file))
    short, long = plans
    assert short.trap.harmonic
    assert long.trap.beams
    assert long.ramp
    assert long.limits.controls
    assert long.measured
    assert long.candidates.keys
    assert long.passenger is not None


@pytest.mark.parametrize("command", COMMANDS)
def test_the_commands_of_the_readme_are_understood(command: str) -> None:
    words = shlex.split(command)
    args = build_parser(words[:1]).parse_args(words)
    for word in words:
        assert not word.startswith("presets/") or (ROOT / word).is_file(), word
    assert args.verb == words[0]
