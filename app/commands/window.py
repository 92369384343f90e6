"""`coldward window`: the window, or pictures of it."""

from __future__ import annotations

import argparse
import os
import sys
from pathlib import Path

from app.commands.trouble import fail

THEMES = ("light", "dark")


def add_parser(verbs: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb to the command line."""
    parser = verbs.add_parser(
        "window", help="the window (also the bare command)", description="Open the window, on a plan or on an example."
    )
    parser.add_argument("plan", nargs="?", metavar="PLAN", help="plan file")
    parser.add_argument("--pictures", metavar="FOLDER", help="write a PNG of every page into a folder and exit")
    parser.add_argument("--theme", choices=THEMES, help="look, for this time; the View menu sets it for good")
    parser.add_argument("--size", metavar="WIDTHxHEIGHT", help="size of the window, such as 1400x900")
    parser.add_argument("--scale", metavar="FACTOR", help="pixels of the screen per pixel of the window, such as 2")
    parser.add_argument("--settings-dir", metavar="FOLDER", help="keep settings and recovery copies there")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Open the window; say in one sentence why where that cannot be."""
    try:
        size, scale = _size(args.size), _scale(args.scale)
    except ValueError as error:
        return fail(error)
    if scale is not None:
        os.environ["QT_SCALE_FACTOR"] = f"{scale:g}"
    has_display = not sys.platform.startswith("linux") or os.environ.get("DISPLAY") or os.environ.get("WAYLAND_DISPLAY")
    if args.pictures and not has_display:
        os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

    # Small matrix products gain nothing from threads, which would take turns away from the window.
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

    from app.window.preflight import obstacle, toolkit_obstacle

    trouble = obstacle() or toolkit_obstacle()
    if trouble is not None:
        return fail(trouble)

    from PySide6.QtCore import QSize

    from app.window.settings import ThemeChoice
    from app.window.start import Wishes, open_window

    return open_window(
        Wishes(
            plan_path=Path(args.plan) if args.plan else None,
            settings_folder=Path(args.settings_dir) if args.settings_dir else None,
            theme=ThemeChoice(args.theme) if args.theme else None,
            size=QSize(*size) if size else None,
            pictures=Path(args.pictures) if args.pictures else None,
        )
    )


def _size(text: str | None) -> tuple[int, int] | None:
    """Width and height of "1400x900"."""
    if text is None:
        return None
    parts = text.lower().replace("×", "x").split("x")
    if len(parts) != 2 or not all(part.isdigit() and 200 <= int(part) <= 10_000 for part in parts):
        raise ValueError(f'--size must be a width and a height from 200 to 10000, such as 1400x900, got "{text}"')
    return int(parts[0]), int(parts[1])


def _scale(text: str | None) -> float | None:
    if text is None:
        return None
    try:
        factor = float(text)
    except ValueError:
        factor = 0.0
    if not 0.5 <= factor <= 8.0:
        raise ValueError(f'--scale must be from 0.5 to 8, got "{text}"')
    return factor
