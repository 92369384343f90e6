"""How a part of an answer is kept: its key is what it depends on."""

from __future__ import annotations

import threading
from collections import OrderedDict
from collections.abc import Callable, Hashable
from functools import update_wrapper
from operator import attrgetter
from typing import TYPE_CHECKING, Any, Concatenate, Generic, ParamSpec, TypeVar

if TYPE_CHECKING:
    from app.plan import Plan

P = ParamSpec("P")
T = TypeVar("T")

_KEPT = 8


class Part(Generic[P, T]):
    """A function of a plan that keeps its newest answers; any thread may ask it."""

    __name__: str

    def __init__(self, function: Callable[Concatenate[Plan, P], T], fields: tuple[str, ...], keep: int) -> None:
        update_wrapper(self, function)
        self._function = function
        self._read: Callable[[Plan], Any] = attrgetter(*fields)
        self._keep = keep
        self._kept: OrderedDict[Hashable, T] = OrderedDict()
        self._lock = threading.Lock()

    def __call__(self, plan: Plan, *args: P.args, **kwargs: P.kwargs) -> T:
        key = self._key(plan, args, kwargs)
        with self._lock:
            if key in self._kept:
                self._kept.move_to_end(key)
                return self._kept[key]
        value = self._function(plan, *args, **kwargs)
        self._remember(key, value)
        return value

    def take(self, answer: T, plan: Plan, *args: P.args, **kwargs: P.kwargs) -> None:
        """Keep an answer that was worked out elsewhere."""
        self._remember(self._key(plan, args, kwargs), answer)

    def _remember(self, key: Hashable, value: T) -> None:
        with self._lock:
            self._kept[key] = value
            if len(self._kept) > self._keep:
                self._kept.popitem(last=False)

    def kept(self, plan: Plan, *args: P.args, **kwargs: P.kwargs) -> T | None:
        """The answer if it is there already; nothing is worked out."""
        with self._lock:
            return self._kept.get(self._key(plan, args, kwargs))

    def _key(self, plan: Plan, args: tuple[Any, ...], kwargs: dict[str, Any]) -> Hashable:
        return self._read(plan), args, tuple(sorted(kwargs.items()))


def part(*fields: str, keep: int = _KEPT) -> Callable[[Callable[Concatenate[Plan, P], T]], Part[P, T]]:
    """Keep a part's newest answers, keyed by the plan fields that it depends on and its other arguments."""

    def decorate(function: Callable[Concatenate[Plan, P], T]) -> Part[P, T]:
        return Part(function, fields, keep)

    return decorate
