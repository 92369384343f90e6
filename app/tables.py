"""Plain-text tables: columns that line up, nothing wrapped or cut."""

from __future__ import annotations

from collections.abc import Iterable, Sequence


def columns(rows: Iterable[Sequence[str]], *, indent: int = 0, right: Iterable[int] = ()) -> list[str]:
    """Lines in which the cells of each column stand below each other.

    Parameters
    ----------
    rows : equally long sequences of texts, else ValueError.
    indent : blanks before each line.
    right : columns set flush right, as numbers are read.
    """
    body = [list(row) for row in rows]
    if not body:
        return []
    if len({len(row) for row in body}) > 1:
        raise ValueError(f"rows must be equally long, got {sorted({len(row) for row in body})} cells")
    widths = [max(len(row[column]) for row in body) for column in range(len(body[0]))]
    flush_right = frozenset(right)

    def line(cells: Sequence[str]) -> str:
        aligned = (
            cell.rjust(width) if column in flush_right else cell.ljust(width)
            for column, (cell, width) in enumerate(zip(cells, widths, strict=True))
        )
        return (" " * indent + "  ".join(aligned)).rstrip()

    return [line(row) for row in body]


def text_table(header: Sequence[str], rows: Iterable[Sequence[str]], *, right: Iterable[int] = ()) -> str:
    """Columns under a header and a rule, as one text; `rows` and `right` as in `columns`."""
    lines = columns([header, *rows], right=right)
    return "\n".join([lines[0], "-" * max(len(line) for line in lines[:1]), *lines[1:]])
