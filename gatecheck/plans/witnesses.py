"""Who else vouches for a sealed plan than those who push to the base: holders of keys, and time-stamp authorities.

Which keys and authorities count is read from the last commit of the base, never from the tree that is judged.
"""

from __future__ import annotations

import functools
from datetime import UTC, datetime

from gatecheck import git
from gatecheck.model.seal import Seal
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Problem
from gatecheck.plans.canonical import digest_of
from gatecheck.plans.order import Line, Version
from gatecheck.plans.reading import bytes_of, plan_of, tidy
from gatecheck.plans.seal import fits
from gatecheck.plans.signatures import signatures_on
from gatecheck.plans.store import Store

_INSTALL_LIBRARY = "run `pip install 'gatecheck-evidence[time]'`"
_INSTALL_SSH = "install OpenSSH, whose ssh-keygen judges it"


@struct
class Sealing:
    """A sealed plan in the history.

    `path` is that of the plan then, `seal` the version of its seal, `says` what that is, and `window` the indexes
    of the commits that hold both and nothing governed.
    """

    line: Line
    path: str
    seal: Version
    says: Seal
    window: range

    @property
    def base(self) -> str:
        """The last commit of the history, whose lists of signers and authorities count."""
        return self.line.history.commits[-1].id


@struct
class Shown:
    """What a witness shows: `held`, or `why` not; with `advice` it is not known, and that would tell."""

    held: str = ""
    why: str = ""
    advice: str = ""


def stamped(store: Store, sealing: Sealing, path: str, made_at: str | None) -> Shown:
    """Judge the time-stamp token that lies at `path` in the last commit of the base, if one does."""
    token = store.at(path, sealing.base)
    if token is None:
        return Shown()
    if isinstance(token, Problem):
        return Shown(why=f"its time-stamp token cannot be read: {token.message}")
    authorities = _listed(store, sealing, store.settings.authorities, "authorities")
    if isinstance(authorities, str):
        return Shown(why=f"a time-stamp token is there, and {authorities}")
    stamp = store.stamp_on(store.bytes_of(sealing.seal), token, authorities)
    if stamp.at is None:
        return Shown(why=stamp.why, advice=_INSTALL_LIBRARY if stamp.unknown else "")
    return _in_time(sealing, stamp.at, made_at)


def _in_time(sealing: Sealing, at: datetime, made_at: str | None) -> Shown:
    """Hold the stamp against the time of the first data or results, which is no more than their own word."""
    told = f"a listed authority stamped the seal by {_shown(at)}"
    by_word = []
    commits = sealing.line.history.commits
    if sealing.window.stop < len(commits):
        first = commits[sealing.window.stop]
        by_word.append((_of_seconds(first.time), f"{first.id[:12]} is of {{}} by its committer's own clock"))
    made = _of_text(made_at)
    if made is not None:
        by_word.append((made, "the results are of {} by their own word"))
    for time, says in by_word:
        if at >= time:
            return Shown(why=f"{told}, which is not before: {says.format(_shown(time))}")
    return Shown(", and ".join([told, *(says.format(_shown(time)) for time, says in by_word)]))


def signed(store: Store, sealing: Sealing) -> Shown:
    """Judge the signatures on commits and tags that hold the sealed plan, where the policy lists signers."""
    if store.settings.signers is None:
        return Shown()
    signers = _listed(store, sealing, store.settings.signers, "signers")
    if isinstance(signers, str):
        return Shown(why=signers)
    asked = (sealing.path, sealing.seal.blob, sealing.window)
    found = store.signatures.get(asked)
    if found is None:
        found = signatures_on(
            store.root, sealing.line.history, sealing.window, signers, functools.partial(_holds, store, sealing)
        )
        store.signatures[asked] = found
    return Shown(found.held or "", found.why, _INSTALL_SSH if found.unknown else "")


def _listed(store: Store, sealing: Sealing, path: str | None, what: str) -> bytes | str:
    """The file in which the base lists whose word counts, or why there is none."""
    if path is None:
        return f"the policy names no {what}"
    inside = tidy(path)
    content = None if inside is None else store.at(inside, sealing.base)
    if content is None:
        return f"the file of {what} {git.safe(path)} is not on the base"
    if isinstance(content, Problem):
        return f"the file of {what} cannot be read: {content.message}"
    return content


def _holds(store: Store, sealing: Sealing, commit: str) -> bool:
    """Whether the commit, which lies beside the line, holds a plan that the same seal fits."""
    plan_bytes = bytes_of(store.root, sealing.path, commit)
    if not isinstance(plan_bytes, bytes):
        return False
    plan = plan_of(sealing.path, plan_bytes)
    if plan.plan is None or not fits(sealing.says, sealing.path, plan.plan.id, digest_of(plan.document)):
        return False
    return bytes_of(store.root, sealing.seal.path, commit) == store.bytes_of(sealing.seal)


def _of_text(text: str | None) -> datetime | None:
    """The time that a record gives, if it can be read; one without a zone is taken as of UTC."""
    try:
        time = datetime.fromisoformat(text or "")
        return time.astimezone(UTC) if time.tzinfo is not None else time.replace(tzinfo=UTC)
    except (ValueError, OverflowError):
        return None


def _of_seconds(seconds: int) -> datetime:
    try:
        return datetime.fromtimestamp(seconds, UTC)
    except (OverflowError, ValueError, OSError):  # git takes any number for a time
        return datetime(9999 if seconds > 0 else 1, 1, 1, tzinfo=UTC)


def _shown(time: datetime) -> str:
    return time.replace(tzinfo=None).isoformat(timespec="seconds") + "Z"
