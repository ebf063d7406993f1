"""Reads the prose of a tree: which files, in which format, and what of it cannot be read."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from pathlib import Path

from gatecheck.git import Entry, safe
from gatecheck.globs import matches
from gatecheck.model.struct import struct
from gatecheck.model.verdict import Place, Problem
from gatecheck.prose import latex, markdown, notebook, restructured
from gatecheck.prose.source import Dialect, Passage, SourceFile
from gatecheck.scan.candidates import is_pointer
from gatecheck.scan.readers import suffix_of
from gatecheck.scan.readers.document import Broken, decoded
from gatecheck.scan.tree import LONGEST_SEARCHED, Unread, contents, listed
from gatecheck.scan.unread import as_text, of_links, of_unmerged

Reader = Callable[[SourceFile], Iterator[Passage]]
_MIB = 1 << 20
_LEAVE_OUT = "leave it out of the prose that is looked at"


def _whole(dialect: Dialect) -> Reader:
    def passages(file: SourceFile) -> Iterator[Passage]:
        yield Passage(file, file.text, dialect)

    return passages


#: How the files of each suffix, in lower case, are read.
READERS: Mapping[str, Reader] = {
    **dict.fromkeys((".md", ".markdown", ".qmd", ".rmd"), _whole(markdown.hidden)),
    ".tex": _whole(latex.hidden),
    ".rst": _whole(restructured.hidden),
    ".ipynb": notebook.passages,
}


@struct
class Prose:
    """The prose of a tree: its passages in the order of the files, and what could not be read."""

    passages: tuple[Passage, ...]
    problems: tuple[Problem, ...]


def read_prose(root: Path, include: Sequence[str], exclude: Sequence[str], revision: str | None = None) -> Prose:
    """Read the prose below `root` in the files that `include` names and `exclude` does not.

    Files whose suffix has no reader are passed over. With `revision` the files are those of that commit.

    Raises
    ------
    CannotJudge
        `root` is no folder, git fails, or the revision is not known.
    """
    tree = listed(root, revision)
    wanted = [entry for entry in tree.entries if suffix_of(entry.path) in READERS]
    wanted = [entry for entry in wanted if matches(include, entry.path) and not matches(exclude, entry.path)]
    links = [entry for entry in wanted if entry.kind == "link"]
    passages: list[Passage] = []
    problems: list[Problem] = []
    read: set[str] = set()
    for entry, content in contents(tree, [entry for entry in wanted if entry.kind in {"file", "unmerged"}]):
        if isinstance(content, Unread):
            links += [entry] if content.why == "link" else []
            problems += _of_unread(entry, content)
        elif entry.kind == "unmerged":
            problems.append(of_unmerged(as_text(entry.path)))
        else:
            read.add(entry.path)
            _read_one(as_text(entry.path), content, passages, problems)
    problems += of_links(tree, links, read)
    return Prose(tuple(sorted(passages, key=lambda one: one.file.path)), tuple(sorted(problems)))


def read_file(path: str, content: bytes) -> tuple[Passage, ...]:
    """Read one file of prose.

    Raises
    ------
    Broken
        It is no text in UTF-8, or no notebook.
    """
    file = SourceFile(path, decoded(content))
    try:
        return tuple(READERS[suffix_of(path)](file))
    except (ValueError, RecursionError) as error:
        line = getattr(error, "lineno", 1)
        raise Broken(line, "is no notebook that can be read", f"write it again, or {_LEAVE_OUT}") from None


def _read_one(path: str, content: bytes, passages: list[Passage], problems: list[Problem]) -> None:
    if is_pointer(content):
        message = "the file is a Git LFS pointer, so its text is not here"
        problems.append(Problem(Place(path), message, "run `git lfs pull`; with actions/checkout, set `lfs: true`"))
        return
    try:
        passages += read_file(path, content)
    except Broken as broken:
        problems.append(broken.problem(path))


def _of_unread(entry: Entry, unread: Unread) -> Iterator[Problem]:
    place = Place(as_text(entry.path))
    if unread.why == "too long":
        size, most = int(unread.says) / _MIB, LONGEST_SEARCHED // _MIB
        yield Problem(place, f"the file has {size:.1f} MiB; prose is read up to {most} MiB", _LEAVE_OUT)
    elif unread.why == "refused":
        yield Problem(place, f"the file cannot be opened ({safe(unread.says)})", "mend its permissions")
    elif unread.why == "not in this clone":
        yield Problem(
            place, "the content of this file is not in this clone", f"clone without --filter, or {_LEAVE_OUT}"
        )
