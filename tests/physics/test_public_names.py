"""`import physics` gives the names that scripts rely on, however much of it has been imported before."""

from __future__ import annotations

import importlib
import pkgutil
import subprocess
import sys
from pathlib import Path

import pytest

import physics

ROOT = Path(__file__).resolve().parents[2]


def test_public_names_are_functions_and_classes_also_when_every_module_is_loaded() -> None:
    for module in pkgutil.walk_packages(physics.__path__, "physics."):
        importlib.import_module(module.name)
    for name in physics.__all__:
        found = getattr(physics, name)
        assert callable(found), name
    assert set(physics.__all__) <= set(dir(physics))


def test_an_unknown_name_is_an_attribute_error() -> None:
    with pytest.raises(AttributeError, match="module 'physics' has no attribute 'bosons'"):
        _ = physics.bosons


def test_physics_alone_imports_nothing_of_the_program() -> None:
    code = (
        "import sys, physics; [getattr(physics, name) for name in physics.__all__]; "
        "print([n for n in ('app', 'PySide6', 'matplotlib', 'pint', 'tomlkit', 'scipy') if n in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_the_example_of_the_readme_runs() -> None:
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    example = text.split("```python\n")[1].split("```")[0]
    names: dict[str, object] = {}
    *body, last = example.strip().splitlines()
    exec("\n".join(body), names)  # our own README
    assert 0.0 <= float(eval(last, names)) <= 1.0
