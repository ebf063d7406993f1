"""The contents that plans are judged on, each read once: versions in the history, files of the base and tree."""

from __future__ import annotations

import functools
from collections.abc import Iterable
from pathlib import Path

from gatecheck import git
from gatecheck.fetching import contents_advice
from gatecheck.history.walk import History
from gatecheck.model.plan_settings import PlanSettings
from gatecheck.model.seal import Seal
from gatecheck.model.verdict import Place, Problem
from gatecheck.plans.canonical import digest_of, whole_digest_of
from gatecheck.plans.order import Line, Version
from gatecheck.plans.reading import LONGEST, PlanFile, bytes_of, plan_of, read_plan, seal_of, too_long
from gatecheck.plans.signatures import Signatures
from gatecheck.plans.stamps import stamp_on
from gatecheck.scan.unread import as_text

_NEW_FILE = "; in a new plan file, as no change of this one reaches that version"


class Store:
    """What a folder, its history and the policy's settings on plans hold."""

    def __init__(self, root: Path, history: History | None, settings: PlanSettings) -> None:
        self.root = root
        self.line = None if history is None else Line(history)
        self.settings = settings
        self._blobs: dict[str, git.Blob] = {}
        #: The digest of all that a plan that was read says, and the one that seals it.
        self.whole_digest_of = functools.cache(lambda plan: whole_digest_of(plan.document))
        self.digest_of = functools.cache(lambda plan: digest_of(plan.document))
        self._seal = functools.cache(self._read_seal)
        self._plan = functools.cache(self._read_version)
        #: The plan in the work tree, by its path.
        self.in_tree = functools.cache(functools.partial(read_plan, root))
        self.stamp_on = functools.cache(stamp_on)
        self.signatures: dict[tuple[str, str | None, range], Signatures] = {}
        #: The file at a path in a commit.
        self.at = functools.cache(functools.partial(bytes_of, root))

    def load(self, versions: Iterable[Version | None]) -> None:
        """Read the contents of many versions at once."""
        wanted = {one.blob for one in versions if one is not None and one.blob is not None}
        new = sorted(wanted - self._blobs.keys())
        if new:
            self._blobs.update(zip(new, git.read_blobs(self.root, new, LONGEST), strict=True))

    def bytes_of(self, version: Version) -> bytes | Problem:
        """Return the content of a version that is a file, or why it cannot be read."""
        self.load([version])
        blob = self._blobs[version.blob or ""]
        if blob.content is not None:
            return blob.content
        if blob.size is not None:
            return too_long(version.path, blob.size)
        clone, advice = contents_advice(self.root)
        return Problem(Place(as_text(version.path)), f"a version of this file is not in {clone}", advice)

    def plan_in(self, version: Version) -> PlanFile:
        """Return the plan of a version."""
        return self._plan(version.path, version.blob, version.commit)

    def seal_in(self, version: Version) -> Seal | None:
        """Return the seal of a version, `None` where it cannot be read."""
        return self._seal(version.path, version.blob)

    def submodule_of(self, path: str) -> str | None:
        """Return the submodule, or the repository inside this one, in which `path` lies, if it lies in one."""
        if self.line is None:
            return None
        return next((one for one in self._submodules if path.startswith(one + "/")), None)

    @functools.cached_property
    def _submodules(self) -> tuple[str, ...]:
        return tuple(one.path for one in git.list_files(self.root) if one.kind == "submodule")

    def _read_seal(self, path: str, blob: str | None) -> Seal | None:
        content = self.bytes_of(Version(0, "", path, blob))
        return None if isinstance(content, Problem) else seal_of(path, content)[0]

    def _read_version(self, path: str, blob: str | None, commit: str) -> PlanFile:
        content = self.bytes_of(Version(0, commit, path, blob))
        if isinstance(content, Problem):
            return PlanFile(path, None, None, (content,))
        plan = plan_of(path, content)
        told = f" (in the version of {commit[:12]}, which counts)"
        problems = tuple(
            Problem(one.at, f"{one.message}{told}", f"{one.advice}{_NEW_FILE}") for one in plan.problems
        )
        return PlanFile(plan.path, plan.plan, plan.document, problems, plan.line)
