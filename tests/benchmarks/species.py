"""Reading a species, over parsing the text of its file."""

from __future__ import annotations

import time
import tomllib
from collections.abc import Callable, Iterator

from physics.species import PRESETS
from physics.species_file import read_species

ROUNDS = 50


def _best(work: Callable[[], object]) -> float:
    times = []
    for _ in range(ROUNDS):
        begin = time.perf_counter()
        work()
        times.append(time.perf_counter() - begin)
    return min(times)


def rows() -> Iterator[tuple[str, float, float | None]]:
    """(what, measured, goal)."""
    path = PRESETS / "40K.toml"
    text = path.read_text(encoding="utf-8")
    yield (
        "reading a species, over parsing its text",
        _best(lambda: read_species(path)) / _best(lambda: tomllib.loads(text)),
        3.0,
    )
