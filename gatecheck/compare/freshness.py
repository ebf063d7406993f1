"""Results against what they were made from: the inputs as they are now, and the order of changes of the code."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence

from gatecheck.model.found import Found
from gatecheck.model.freshness import FileHash, Freshness, InputFact, Unhashed
from gatecheck.model.record import InputFile, Provenance

_WHY: dict[Unhashed, str] = {
    "outside": "lies outside of the repository",
    "no file": "is a folder or a device and no file",
    "refused": "cannot be read",
    "too long": "is too long to be read from the repository",
    "not in this clone": "is not in this clone",
}
#: The place of the last change of a file in the order of changes, by its path; `None` where it is not known. It is
#: infinite for what is not committed yet, and minus infinite for what has not changed since the history is cut.
Order = Callable[[str], float | None]


def expected_inputs(found: Sequence[Found]) -> dict[str, frozenset[str]]:
    """Return the paths of all inputs that the records name, with the digests that they give of them."""
    expected: dict[str, frozenset[str]] = {}
    for one in found:
        for each in _provenance(one).inputs:
            given = frozenset() if each.sha256 is None else frozenset([each.sha256])
            expected[each.path] = expected.get(each.path, frozenset()) | given
    return expected


def freshness_of(found: Sequence[Found], hashes: Mapping[str, FileHash], order: Order) -> tuple[Freshness, ...]:
    """Return what stands behind each record, by the `hashes` of inputs by path and the `order` of changes."""
    return tuple(_of_record(one, hashes, order) for one in found)


def _of_record(one: Found, hashes: Mapping[str, FileHash], order: Order) -> Freshness:
    provenance = _provenance(one)
    inputs = tuple(_of_input(each, hashes[each.path]) for each in provenance.inputs)
    code = provenance.code
    if code is None:
        return Freshness(inputs)
    made, written = order(one.at.path), order(code)
    if made is None or written is None or made == written == -math.inf:
        return Freshness(inputs, code)
    return Freshness(inputs, code, written > made)


def _provenance(one: Found) -> Provenance:
    return one.record.provenance or Provenance()


def _of_input(recorded: InputFile, found: FileHash) -> InputFact:
    if found.why == "missing":
        return InputFact(recorded.path, "missing", recorded.sha256 or "")
    if recorded.sha256 is None:
        return InputFact(recorded.path, "unknown", why="has no sha256 in the record")
    if found.why is not None:
        return InputFact(recorded.path, "unknown", recorded.sha256, why=_WHY[found.why])
    same = recorded.sha256 == found.sha256 or recorded.sha256 in found.also
    return InputFact(recorded.path, "same" if same else "changed", recorded.sha256, found.sha256)
