"""The digest of a plan, by what it says and not by how it is written; and what may still be filled in later.

The digest is the SHA-256 of the canonical JSON of the parsed document, in ASCII:

- no spaces; the keys of each object in the order of their code points; lists in their own order;
- a text as it is, without any normalisation, with every letter beyond ASCII escaped as backslash, u and four
  lower-case hexadecimal digits (two such, a surrogate pair, beyond the basic plane);
- a number as the double that it stands for: without point and exponent where it is whole, else in the fewest
  digits that read back as this double, the way Python writes it (``0.05``, ``1e-05``). So ``36``, ``36.0`` and
  ``3.6e1`` are the same, but a number and the same digits in quotes are not: these are a rounded figure;
- ``true``, ``false`` and ``null`` as such. A key with ``null`` and a key left out are not the same.

Left out is what fills a deferred slot. Of a hypothesis with ``deferred: true`` the keys `OPEN_HYPOTHESIS` stay, of
an ``n`` with ``deferred: true`` the keys `OPEN_SAMPLE`: so a slot is filled, its mark kept, and the seal holds.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Collection, Iterator, Mapping
from typing import Any

Document = Mapping[str, Any]

#: What a deferred hypothesis says before it is filled in; a fill adds other keys and changes none of these.
OPEN_HYPOTHESIS = frozenset({"id", "text", "role", "family", "deferred"})
#: What a deferred number of units says before it is filled in.
OPEN_SAMPLE = frozenset({"unit", "deferred"})


def canonical(document: Any) -> str:
    """Return the canonical JSON of the whole of a parsed document that was read without fault."""
    return json.dumps(_plain(document), sort_keys=True, separators=(",", ":"), ensure_ascii=True)


def digest_of(document: Document) -> str:
    """Return the digest that seals a parsed plan: ``sha256:`` and 64 hexadecimal digits."""
    sealed = dict(document)
    if isinstance(sealed.get("hypotheses"), list):
        sealed["hypotheses"] = [_sealed(each) for each in sealed["hypotheses"]]
    return whole_digest_of(sealed)


def whole_digest_of(document: Any) -> str:
    """Return the digest of all that a parsed plan says, deferred slots as they are filled, in the same form."""
    return f"sha256:{hashlib.sha256(canonical(document).encode('ascii')).hexdigest()}"


def has_open_slots(document: Document) -> bool:
    """Whether a deferred slot of the plan is still to be filled in."""
    return any(
        _is_open(each, OPEN_HYPOTHESIS) or _is_open(each.get("n") or {}, OPEN_SAMPLE) for each in _each(document)
    )


def filled(document: Document, later: Document) -> Document:
    """Return the plan with its open slots as `later` fills them, and all else as it is."""
    by_id = {each["id"]: each for each in _each(later)}
    return {**document, "hypotheses": [_filled(each, by_id.get(each["id"], {})) for each in _each(document)]}


def _plain(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {key: _plain(inner) for key, inner in value.items()}
    if isinstance(value, list):
        return [_plain(inner) for inner in value]
    if isinstance(value, bool) or not isinstance(value, int | float):
        return value
    number = float(value)
    return int(number) if number.is_integer() else number


def _each(document: Document) -> Iterator[Document]:
    yield from document.get("hypotheses") or ()


def _sealed(hypothesis: Document) -> Document:
    if _is_deferred(hypothesis):
        return _kept(hypothesis, OPEN_HYPOTHESIS)
    sample: Document = hypothesis.get("n") or {}
    return {**hypothesis, "n": _kept(sample, OPEN_SAMPLE)} if _is_deferred(sample) else hypothesis


def _kept(slot: Document, keys: Collection[str]) -> Document:
    return {key: value for key, value in slot.items() if key in keys}


def _is_deferred(slot: Document) -> bool:
    return slot.get("deferred") is True


def _is_open(slot: Document, keys: Collection[str]) -> bool:
    return _is_deferred(slot) and set(slot) <= set(keys)


def _filled(hypothesis: Document, later: Document) -> Document:
    if _is_open(hypothesis, OPEN_HYPOTHESIS):
        return {**later, **hypothesis}
    sample: Document = hypothesis.get("n") or {}
    if _is_open(sample, OPEN_SAMPLE):
        return {**hypothesis, "n": {**(later.get("n") or {}), **sample}}
    return hypothesis
