"""How data is held: in fields that are named once, never assigned to, and cheap to define when a module loads."""

from __future__ import annotations

import dataclasses
from threading import RLock
from typing import Any, TypeVar, dataclass_transform

T = TypeVar("T")
_LOCK = RLock()


@dataclass_transform(frozen_default=True, eq_default=False)
def struct(cls: type[T]) -> type[T]:
    """Make `cls` a dataclass whose instances are compared by identity and never assigned to.

    What a dataclass writes is compiled, which for all of ours together would cost more start-up time than to judge
    some hundred records, of which a run needs a third. So there is no comparison and no picture, it is the type
    checker that refuses assignments, and the rest is written when the class is first made an instance of, or asked
    for its fields.
    """
    cls.__dataclass_fields__ = _Later(cls)  # type: ignore[attr-defined]  # found there by `dataclasses`

    def complete_and_fill(self: T, *values: Any, **named: Any) -> None:
        _complete(cls)
        cls.__init__(self, *values, **named)

    cls.__init__ = complete_and_fill  # type: ignore[assignment]  # stands in for the one to be written
    return cls


class _Later:
    """The fields of a class that is no dataclass yet: whoever asks for them makes it one."""

    def __init__(self, cls: type) -> None:
        self.cls = cls

    def __get__(self, instance: object, owner: type) -> dict[str, dataclasses.Field[Any]]:
        _complete(self.cls)
        fields: dict[str, dataclasses.Field[Any]] = self.cls.__dict__["__dataclass_fields__"]
        return fields


def _complete(cls: type) -> None:
    with _LOCK:  # two threads may both be the first
        if isinstance(cls.__dict__["__dataclass_fields__"], _Later):
            del cls.__init__  # type: ignore[misc]  # a dataclass replaces no method that a class has
            dataclasses.dataclass(eq=False, repr=False)(cls)
