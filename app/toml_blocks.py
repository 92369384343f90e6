"""The sections of a TOML text as blocks of lines, so that whole sections move with the comments above them.

A block is a header, the comment lines right above it, and all that follows up to the next block. Joined, the blocks
are the text again. What looks like a header within a text of several lines counts as one; whoever moves blocks must
read the result and compare.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise

_KEY = r"[A-Za-z0-9_-]+"
_HEADER = re.compile(rf"[ \t]*\[\[?[ \t]*({_KEY}(?:[ \t]*\.[ \t]*{_KEY})*)[ \t]*\]\]?[ \t]*(?:#.*)?\r?\n?")
_COMMENT = re.compile(r"[ \t]*#")


@dataclass(frozen=True, eq=False)
class Block:
    """path : dotted path of the header; empty for what stands before the first one."""

    path: str
    text: str


def blocks_of(text: str) -> list[Block]:
    """The blocks of a text, in order."""
    lines = _lines_of(text)
    starts, paths = [0], [""]
    for number, line in enumerate(lines):
        header = _HEADER.fullmatch(line)
        if header is None:
            continue
        start = number
        while start > starts[-1] and _COMMENT.match(lines[start - 1]):
            start -= 1
        # Comments that open the file are about the file, unless an empty line sets them off.
        if len(starts) == 1 and start == 0:
            start = number
        starts.append(start)
        paths.append(re.sub(r"\s", "", header[1]))
    ends = [*starts[1:], len(lines)]
    return [Block(path, "".join(lines[a:b])) for path, a, b in zip(paths, starts, ends, strict=True)]


def joined(blocks: Sequence[Block], before: Sequence[Block]) -> str:
    """The text of blocks. Two that did not follow each other before are set apart as the others are."""
    neighbours = {(id(a), id(b)) for a, b in pairwise(before)}
    whole = "".join(block.text for block in before)
    end = "\r\n" if "\r\n" in whole else "\n"
    gap = end if 2 * end in whole or not whole.strip() else ""
    text = ""
    last: Block | None = None
    for block in blocks:
        if text and (id(last), id(block)) not in neighbours:
            text = text if text.endswith("\n") else text + end
            text = text if text.endswith(2 * end) else text + gap
        text += block.text if block in before else block.text.replace("\n", end)
        last = block
    return text if not before or last is before[-1] else text.rstrip() + end


def replaced(
    blocks: Sequence[Block], old: Sequence[Block], new: Sequence[Block], home: Callable[[Sequence[Block]], int]
) -> list[Block]:
    """Blocks with the new ones in the places of the old ones; those that are left over follow the last of these.

    home : where there was no old one, the place of the first new one among the other blocks
    """
    waiting = list(new)
    result: list[Block] = []
    end = None
    for block in blocks:
        if block not in old:
            result.append(block)
        elif waiting:
            result.append(waiting.pop(0))
            end = len(result)
    if end is None:
        end = home(result)
    return [*result[:end], *waiting, *result[end:]]


def with_lines(block: Block, lines: Sequence[str], *, first: bool = False) -> Block:
    """The block with more lines: under its header, or after its last entry, before comments that close it."""
    if not lines:
        return block
    old = _lines_of(block.text)
    end = "\r\n" if block.text.endswith("\r\n") else "\n"
    headers = [place for place, line in enumerate(old, start=1) if block.path and _HEADER.fullmatch(line)]
    place = next(iter(headers), 0)
    if not first:
        full = [place for place, line in enumerate(old, start=1) if line.strip() and not _COMMENT.match(line)]
        place = full[-1] if full else len(old)
    if place and not old[place - 1].endswith("\n"):
        old[place - 1] += end
    return Block(block.path, "".join([*old[:place], *(line + end for line in lines), *old[place:]]))


def _lines_of(text: str) -> list[str]:
    return re.findall(r"[^\n]*\n|[^\n]+", text)
