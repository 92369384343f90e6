"""Prints the speed figures: `python tests/benchmarks/run.py [NAME ...]`.

Each module beside this file has `rows()`, which yields (what, measured, goal). Figures are ratios to a reference
measured in the same run, so that they hold on other machines; where a row is in milliseconds it says so.
"""

from __future__ import annotations

import importlib.util
import os
import sys
from collections.abc import Iterator
from pathlib import Path
from types import ModuleType

HERE = Path(__file__).resolve().parent


def load(path: Path) -> ModuleType:
    """A benchmark module, from its file."""
    spec = importlib.util.spec_from_file_location(f"coldward_benchmark_{path.stem}", path)
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module


def modules(names: list[str]) -> Iterator[tuple[str, ModuleType]]:
    """The benchmark modules of these names, or all."""
    paths = sorted(path for path in HERE.glob("*.py") if path.name != "run.py")
    unknown = set(names) - {path.stem for path in paths}
    if unknown:
        known = ", ".join(path.stem for path in paths)
        raise SystemExit(f"no benchmark {', '.join(sorted(unknown))!r}; there are {known}")
    for path in paths:
        if not names or path.stem in names:
            yield path.stem, load(path)


def main() -> None:
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
    sys.path.insert(0, str(HERE.parent.parent))
    print(f"{'':62}{'measured':>10}{'goal':>10}")
    for name, module in modules(sys.argv[1:]):
        print(name)
        for what, measured, goal in module.rows():
            mark = "" if goal is None or measured <= goal else "  over"
            print(f"  {what:60}{measured:10.4g}{'' if goal is None else f'{goal:10.4g}'}{mark}", flush=True)


if __name__ == "__main__":
    main()
