"""How data is held: with slots, never assigned to, and cheap to define when a module loads."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeVar, dataclass_transform

T = TypeVar("T")


@dataclass_transform(frozen_default=True, eq_default=False)
def struct(cls: type[T]) -> type[T]:
    """Make `cls` a dataclass with slots whose instances are compared by identity and never assigned to.

    Every method that a dataclass writes is compiled when its module loads, which for all of ours together
    would cost more start-up time than to judge some hundred records. So there is no comparison and no picture,
    and it is the type checker that refuses assignments.
    """
    return dataclass(slots=True, eq=False, repr=False)(cls)
