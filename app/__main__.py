"""`coldward`, `python -m app`: one of the verbs, or the window."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from importlib import import_module

from app import __version__

VERBS = ("window", "state", "trap", "map", "profile", "evaporate", "compare", "table", "species")
"""Modules of app.commands, in the order in which help lists them."""

_DESCRIPTION = """\
Plan the cooling of trapped atoms to a Bose-Einstein condensate or a degenerate Fermi gas.
Without a verb the window opens. Answers are planning estimates; the program controls no hardware."""


def build_parser(wanted: Sequence[str] = VERBS) -> argparse.ArgumentParser:
    """The command line, with all verbs or only those wanted: a verb need not wait for the others to load."""
    parser = argparse.ArgumentParser(
        prog="coldward", description=_DESCRIPTION, formatter_class=argparse.RawDescriptionHelpFormatter
    )
    parser.add_argument("--version", action="version", version=f"coldward {__version__}")
    verbs = parser.add_subparsers(dest="verb", metavar="VERB", required=True)
    for verb in wanted:
        import_module(f"app.commands.{verb}").add_parser(verbs)
    return parser


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command line.

    Exit status: 0 answered, 1 a file, value or some rows could not be answered, 2 the command line could not be read.
    """
    if getattr(sys, "frozen", False):
        from multiprocessing import freeze_support

        freeze_support()  # an executable of one file starts itself for `app.process`
    given = list(sys.argv[1:] if arguments is None else arguments) or ["window"]
    args = build_parser(given[:1] if given[0] in VERBS else VERBS).parse_args(given)
    try:
        return int(args.run(args))
    except ArithmeticError as error:
        # Numbers at the edge of what can be given, where a model finds no solution.
        print(f"coldward: {error}", file=sys.stderr)
        return 1
    except BrokenPipeError:
        # The reader of a pipe has what it wanted; stdout must not complain once more at exit.
        sys.stdout = None
        return 0
    except KeyboardInterrupt:
        return 130


if __name__ == "__main__":
    raise SystemExit(main())
