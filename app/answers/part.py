"""How a part of an answer is kept: its key is what it depends on."""

from __future__ import annotations

import threading
from collections import OrderedDict
from collections.abc import Callable, Hashable
from functools import wraps
from operator import attrgetter
from typing import TYPE_CHECKING, Concatenate, ParamSpec, TypeVar

if TYPE_CHECKING:
    from app.plan import Plan

P = ParamSpec("P")
T = TypeVar("T")

_KEPT = 8


def part(*fields: str) -> Callable[[Callable[Concatenate[Plan, P], T]], Callable[Concatenate[Plan, P], T]]:
    """Keep a part's newest answers, keyed by the plan fields that it depends on and its other arguments."""

    def decorate(function: Callable[Concatenate[Plan, P], T]) -> Callable[Concatenate[Plan, P], T]:
        read = attrgetter(*fields)
        kept: OrderedDict[Hashable, T] = OrderedDict()
        lock = threading.Lock()

        @wraps(function)
        def answer(plan: Plan, *args: P.args, **kwargs: P.kwargs) -> T:
            key = (read(plan), args, tuple(sorted(kwargs.items())))
            with lock:
                if key in kept:
                    kept.move_to_end(key)
                    return kept[key]
            value = function(plan, *args, **kwargs)
            with lock:
                kept[key] = value
                if len(kept) > _KEPT:
                    kept.popitem(last=False)
            return value

        return answer  # type: ignore[return-value]  # wraps() forgets that `plan` may be given by place only

    return decorate
