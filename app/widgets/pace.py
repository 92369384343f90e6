"""Work for plans that come faster than it is done, as in a drag.

What is under way is finished and shown, and the newest plan follows; else each would be overtaken by the next, and none
shown.
"""

from __future__ import annotations

import time

PATIENCE = 5.0
"""[s] After which work that has not come back is taken for lost."""


class Pace:
    """Whether work may begin now, and whether more is wanted once it is done."""

    def __init__(self) -> None:
        self._under_way = self._overtaken = False
        self._since = 0.0

    def begin(self) -> bool:
        """Whether to begin; else it is noted that there is something newer than what is under way."""
        now = time.monotonic()
        if self._under_way and now - self._since < PATIENCE:
            self._overtaken = True
            return False
        self._under_way, self._since = True, now
        return True

    def arrived(self) -> bool:
        """The work is done, or given up; whether there is something newer."""
        newer, self._overtaken, self._under_way = self._overtaken, False, False
        return newer
