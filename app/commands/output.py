"""Where an answer goes: a table on stdout or in a file, or a picture, by the ending of the file's name."""

from __future__ import annotations

import sys
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

from app.files import write_atomically

PICTURES = (".png", ".svg", ".pdf")


def write_answer(output: str | None, table: Callable[[], str], pictures: Callable[[], Sequence[Any]]) -> None:
    """Write `table()` as CSV, or `pictures()` as PNG, SVG or PDF.

    Raises ValueError, naming the endings that are known, for any other file name.
    """
    if output is None:
        sys.stdout.write(table())
        return
    path = Path(output)
    ending = path.suffix.lower()
    if ending == ".csv":
        write_atomically(path, table().encode())
    elif ending in PICTURES:
        from app.figures.draw import picture_bytes

        write_atomically(path, picture_bytes(pictures(), ending.removeprefix(".")))
    else:
        raise ValueError(f'"{output}" must end in .csv, .png, .svg or .pdf')
