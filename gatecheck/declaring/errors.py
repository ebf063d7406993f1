"""The one error that `declare` raises."""

from __future__ import annotations

from collections.abc import Iterable

from gatecheck.schema.read import Fault


class DeclareError(ValueError):
    """A record that cannot be made from what was given; its message says what to give."""


def incomplete(name: object, faults: Iterable[Fault]) -> DeclareError:
    """Return the error that tells all `faults` of the record `name` at once."""
    lines = [f"  {fault.field} {fault.message}: {fault.advice}" for fault in faults]
    return DeclareError("\n".join([f"the record {name!r} was not written:", *lines]))
