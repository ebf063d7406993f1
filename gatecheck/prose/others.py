"""Results of others in prose: lists of references, and sentences that cite and do not speak of this work."""

from __future__ import annotations

import re
from collections.abc import Sequence

#: A list of references holds results of others.
_REFERENCES = re.compile(
    r"^(?P<marks>#{1,6})[ \t]+(?:\d[\d.]*[ \t]+)?(?:References|Bibliography|(?:Literature|Works)[ \t]cited)\b",
    re.IGNORECASE | re.MULTILINE,
)
_YEAR = r"(?:19|20)\d\d[a-z]?\b"
_NAME = (
    r"\b(?!(?:January|February|March|April|May|June|July|August|September|October|November|December|Spring|Summer"
    r"|Autumn|Fall|Winter|Year|Season|Table|Figure|Section|Version|In|Since|Until|From|Of|By)\b)[A-Z][^\W\d_]+"
)
#: Ways to cite: "et al.", `[@key]`, `\\cite{key}`, `:cite:`, "Name (2031)" and "(Name, 2031)".
_CITES = re.compile(
    rf"\bet al\b|\[-?@\w|(?<![\w.])@[^\W\d_][\w:-]*\d{{4}}|\\[a-z]*cite[a-z]*\*?[\[{{]|:cite(?::[a-z]+)?:`"
    rf"|{_NAME}\s\({_YEAR}|\([^()\n]{{0,80}}{_NAME},?\s{_YEAR}"
)
_OURS = re.compile(
    r"\b(?:we|our|ours|us|here|this (?:study|sample|experiment|trial|paper|analysis)|present)\b", re.IGNORECASE
)


def references(text: str) -> Sequence[tuple[int, int]]:
    """Return the sections of a Markdown text that list references."""
    sections = []
    for found in _REFERENCES.finditer(text):
        after = re.compile(rf"^#{{1,{len(found['marks'])}}}[ \t]", re.MULTILINE).search(text, found.end())
        sections.append((found.start(), after.start() if after else len(text)))
    return sections


def tells_of_others(sentence: str) -> bool:
    """Whether a sentence cites the work of others and does not speak of this one."""
    return _CITES.search(sentence) is not None and _OURS.search(sentence) is None
