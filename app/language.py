"""The language of the sentences: the user's where a catalogue is installed, English otherwise.

The catalogue is looked for once; gettext's own shortcut would search the disk at every sentence.
"""

from __future__ import annotations

from collections.abc import Callable
from gettext import translation

translate: Callable[[str], str] = translation("coldward", fallback=True).gettext
"""A sentence in the user's language. Modules import it as `_`, the name that catalogue tools look for."""
