"""How a verb says that it has no answer."""

from __future__ import annotations

import sys


def fail(message: object) -> int:
    """Say on stderr, in one line, why there is no answer; exit status 1."""
    if isinstance(message, OSError) and message.filename is not None:
        message = f"{message.filename}: {message.strerror or message}"
    print(f"coldward: {message}", file=sys.stderr)
    return 1
