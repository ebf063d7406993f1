"""Which policy stands: that of the base, of the tree, or the built-in one where there is none."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

from gatecheck import git
from gatecheck.errors import CannotJudge
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, PolicyUsed, Problem
from gatecheck.policy import STARTING_POLICY, Document, Policy, RuleSettings, read_policy
from gatecheck.rules import ALWAYS_ON, NAMES, rule_named
from gatecheck.scan.one_file import OneFile, read_one
from gatecheck.schema.read import Fault

POLICY_FILE = "gatecheck.yaml"


class _SettingsOfRules(Mapping[str, type[RuleSettings]]):
    """The type of the settings of each rule by its name; a rule is loaded where a policy names it."""

    def __getitem__(self, name: str) -> type[RuleSettings]:
        if name not in NAMES:
            raise KeyError(name)
        return rule_named(name).settings

    def __iter__(self) -> Iterator[str]:
        return iter(NAMES)

    def __len__(self) -> int:
        return len(NAMES)


@struct
class Standing:
    """The policy that stands, where it came from, and what the summary must say of it.

    `proposed` is the policy of the tree where that of the base stands and the two differ.
    """

    policy: Policy | None
    used: PolicyUsed | None
    problems: tuple[Problem, ...] = ()
    notes: tuple[str, ...] = ()
    proposed: Policy | None = None


def standing_policy(root: Path, named: str | None, base: str | None, departed: str | None = None) -> Standing:
    """Return the policy for the tree at `root`.

    `named` is the policy file relative to `root`, else it is `gatecheck.yaml`. With `base` the file is read as
    it stands at that revision: a pull request does not change the policy that it is judged by. What the request
    itself changes is told against the commit `departed`, where that is not the base.

    Raises
    ------
    CannotJudge
        A named policy is not there, the base is not known, or git fails.
    """
    path = named or POLICY_FILE
    revision = None if base is None else git.resolve(root, base)
    file = read_one(root, path, revision)
    in_tree = file if revision is None else read_one(root, path)
    before = file if departed in {None, revision} else read_one(root, path, departed)
    notes = () if revision is None else _notes_on_base(path, revision, _Versions(in_tree, before, file))
    proposed = _proposed(in_tree, file) if _differ(in_tree, before) else None
    if file is not None:
        return replace(_from_file(file, revision, notes), proposed=proposed)
    if named is not None:
        where = "" if base is None else f" at {git.safe(base)}"
        raise CannotJudge(f"there is no policy {git.safe(named)}{where}", "name a policy file that is there")
    policy, _ = read_own_policy(STARTING_POLICY)
    used = _used(STARTING_POLICY, _digest_of_starting())
    return Standing(policy, used, (), (*notes, _note_on_none(in_tree, base)), proposed)


def read_own_policy(document: Any) -> tuple[Policy | None, tuple[Fault, ...]]:
    """Read a parsed policy by the rules that there are; see `read_policy`."""
    return read_policy(document, _SettingsOfRules(), ALWAYS_ON)


def _from_file(file: OneFile, revision: str | None, notes: tuple[str, ...]) -> Standing:
    if file.document is None:
        return Standing(None, None, file.problems, notes)
    policy, faults = read_own_policy(file.document.value)
    if policy is None:
        locate = file.document.locate
        problems = tuple(_problem(fault, Place(file.path, locate(fault.path))) for fault in faults)
        return Standing(None, None, problems, notes)
    used = PolicyUsed(policy.document.name, file.digest, "tree" if revision is None else "base")
    return Standing(policy, used, (), notes)


def _problem(fault: Fault, place: Place) -> Problem:
    field = f"{fault.field} " if fault.path else "the policy "
    return Problem(place, f"{field}{fault.message}", fault.advice)


def _proposed(in_tree: OneFile | None, file: OneFile | None) -> Policy | None:
    """The policy that the tree would have; one that cannot be read is told when it is the base's."""
    if in_tree is None or in_tree.document is None or (file is not None and in_tree.digest == file.digest):
        return None
    return read_own_policy(in_tree.document.value)[0]


@struct
class _Versions:
    """The policy file of the tree, where a request departs from its base, and of the base."""

    in_tree: OneFile | None
    before: OneFile | None
    at_base: OneFile | None


def _differ(first: OneFile | None, second: OneFile | None) -> bool:
    return (first and first.digest) != (second and second.digest)


def _notes_on_base(path: str, revision: str, file: _Versions) -> tuple[str, ...]:
    if not _differ(file.in_tree, file.at_base):
        return ()
    counts = f"what counts is the base, {revision[:12]}"
    if not _differ(file.in_tree, file.before):
        return (f"The policy {git.safe(path)} has changed at the base since this request departed; {counts}.",)
    what = "new" if file.before is None else "removed" if file.in_tree is None else "changed"
    return (f"The policy {git.safe(path)} is {what} here; {counts}.",)


def _note_on_none(in_tree: OneFile | None, base: str | None) -> str:
    where = f"No {POLICY_FILE} is here" if base is None else f"The base has no {POLICY_FILE}"
    advice = "; `gatecheck start` writes one" if in_tree is None else ""
    return f"{where}, so the built-in starting policy applies{advice}."


def _used(document: Document, digest: str) -> PolicyUsed:
    return PolicyUsed(document["name"], digest, "built-in")


def _digest_of_starting() -> str:
    import hashlib  # noqa: PLC0415  # costs start-up time, and a tree with a policy does not need it

    canonical = json.dumps(STARTING_POLICY, sort_keys=True, separators=(",", ":"))
    return f"sha256:{hashlib.sha256(canonical.encode()).hexdigest()}"
