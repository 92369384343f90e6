"""The best evaporation of a candidate: how many atoms it leaves at the target, and how long it takes."""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True)
class EvaporationResult:
    """What is left at the target.

    atoms : per spin state; NaN where it is not reached
    time : [s]; NaN where it is not reached
    reason : why it is not, as a clause; empty where it is
    """

    atoms: float = math.nan
    time: float = math.nan
    reason: str = ""
