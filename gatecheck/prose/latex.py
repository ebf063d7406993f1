r"""LaTeX: comments, verbatim text, addresses and the list of references are no prose.

A marker is a comment: `% gatecheck: ID FIELD` up to the end of its line.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from gatecheck.prose.markers import marker_in
from gatecheck.prose.source import Hidden, stretches

#: Environments whose text is printed as it stands, is left out, or is of others.
_ENVIRONMENTS = ("verbatim", "Verbatim", "lstlisting", "minted", "comment", "filecontents", "thebibliography")
_OPENING = re.compile(
    rf"\\(?:begin\{{(?P<environment>{'|'.join(_ENVIRONMENTS)})\*?\}}|(?P<address>url|path|href)\{{"
    r"|(?:verb|lstinline)\*?(?P<mark>[^\sA-Za-z*])|.)|(?P<comment>%)",
    re.DOTALL,
)
_LINE_END = re.compile(r"$", re.MULTILINE)


def hidden(text: str) -> Iterator[Hidden]:
    """Return comments, verbatim text, addresses and lists of references, in order."""
    return stretches(_OPENING, _opened, text)


def _opened(text: str, found: re.Match[str]) -> Hidden | None:
    start, after = found.span()
    if found["comment"]:
        end = _line_end(text, after)
        return Hidden(start, end, marker_in(text[after:end]))
    if found["environment"]:
        return Hidden(start, _closed(text, after, f"\\end{{{found['environment']}", len(text)))
    closing = "}" if found["address"] else found["mark"]
    return Hidden(start, _closed(text, after, closing, after)) if closing else None


def _line_end(text: str, at: int) -> int:
    end = text.find("\n", at)
    return len(text) if end < 0 else end


def _closed(text: str, at: int, closing: str, otherwise: int) -> int:
    end = text.find(closing, at)
    return otherwise if end < 0 else end + len(closing)
