"""What `adopt` has done, as plain text."""

from __future__ import annotations

from gatecheck.model.accepted import Adoption
from gatecheck.render import words
from gatecheck.render.layout import page, paragraph

#: The rule that judges plans.
_OF_PLANS = "all-promised-reported"
_ONLY_REMOVES = (
    "A list that is there only gets shorter, so that what falls short anew is not accepted unseen; to accept what "
    "falls short now, delete the file and adopt again."
)


def told(done: Adoption, path: str, again: bool, width: int) -> str:
    """Return what was written to the list at `path`, which was there before where it is done `again`."""
    entries = words.count(len(done.entries), "shortfall")
    if not again:
        if not done.entries:
            return page([
                paragraph(f"Nothing that blocks is short of the policy, so {path} was not written.", width)
            ])
        return page([
            paragraph(
                f"Accepted {entries} of {_whose(done)} in {path}: each holds until its {_one(done)} changes in "
                "what the rule reads. Commit this file; on a pull request the one that counts is that of the base.",
                width,
            )
        ])
    dropped = words.count(done.dropped, "entry", "entries")
    return page([
        paragraph(f"{path} lists {entries}; taken off it: {dropped}.", width),
        paragraph(_ONLY_REMOVES, width),
    ])


def _whose(done: Adoption) -> str:
    """How many records fell short, and how many plans."""
    plans = {each.record for each in done.entries if each.rule == _OF_PLANS}
    records = {each.record for each in done.entries if each.rule != _OF_PLANS}
    counted = ((len(records), "record"), (len(plans), "plan"))
    return " and ".join(words.count(number, noun) for number, noun in counted if number)


def _one(done: Adoption) -> str:
    rules = {each.rule == _OF_PLANS for each in done.entries}
    return {frozenset({True}): "plan", frozenset({False}): "record"}.get(frozenset(rules), "record or plan")
