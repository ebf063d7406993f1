"""The verdict as one page of HTML that needs nothing else, for the person who signs.

It stands by itself: it loads no file and no address, and its own program works on numbers alone. Without that
program all is there save the slider, the filter, and the drawings of records far down.
"""

from __future__ import annotations

import base64
import hashlib
from collections.abc import Iterator, Sequence
from pathlib import Path

from gatecheck.model.struct import struct
from gatecheck.model.verdict import Judged, Verdict
from gatecheck.render import order, words
from gatecheck.render.page.claim import claim
from gatecheck.render.page.index import index
from gatecheck.render.page.numbers import embedded
from gatecheck.render.page.parts import closing, common, noted, opening, reading, told
from gatecheck.render.page.shared import Shared
from gatecheck.render.page.tools import tools
from gatecheck.render.page.wording import said

_FOLDER = Path(__file__).parent
#: A person reads no more than these from end to end, and a page of thousands must open at once.
_MOST_UNFOLDED = 200
#: Further records are drawn by the page's own program, when they are opened or where they are open.
_MOST_DRAWN = 20
#: Of more records than these the ones far from what is seen are not laid out, the folded ones by so many at once.
_ALL_LAID_OUT = 200
_TOGETHER = 50


@struct
class Section:
    """Records under one heading; they are `unfolded` where the person who signs must read them."""

    name: str
    title: str
    judged: list[Judged]
    unfolded: bool = False


def page(verdict: Verdict) -> str:
    """Return the verdict as HTML: what blocks first and in full, then the rest folded, then what was not seen."""
    sections = [section for section in _sections(verdict) if section.judged]
    shown = [one for section in sections for one in section.judged]
    shared = Shared(shown)
    many = ' class="many"' if len(shown) > _ALL_LAID_OUT else ""
    return (
        f'<!DOCTYPE html>\n<html lang="en">\n{_head(verdict)}<body>\n'
        f'<svg class="defs" aria-hidden="true">{shared.axes.drawn()}</svg>\n'
        f"<header>\n{opening(verdict)}</header>\n{_contents(sections)}<main{many}>\n"
        f"{told(verdict)}{reading() if shown else ''}{tools(shown)}{common(shared.common)}"
        f"{_claims(sections, shared)}{index(shown)}{noted(shared.notes)}{closing(verdict)}</main>\n"
        f'<script type="application/json" id="numbers">{embedded(shown, shared.axes, _MOST_DRAWN)}</script>\n'
        f"<script>{_program()}</script>\n</body>\n</html>\n"
    )


def _sections(verdict: Verdict) -> Iterator[Section]:
    held = order.blocked(verdict)
    short = [one for one in held if one.standing == "falls-short"]
    undecided = [one for one in held if one.standing == "undecided"]
    yield Section("short", "Short of the policy", short, unfolded=True)
    yield Section("undecided", "Undecided", undecided, unfolded=True)
    yield Section("waived", "Waived", order.with_waiver(verdict), unfolded=True)
    yield Section("unchanged", "Short or undecided, but unchanged", order.blocked(verdict, counting=False))
    yield Section("standing", "Standing", order.standing(verdict))
    yield Section("reported", "Reported without a claim", order.without_claim(verdict))
    yield Section("others", "Plans, text and code that block nothing", order.others_standing(verdict))


def _head(verdict: Verdict) -> str:
    style, program = _own_text("style.css"), _program()
    policy = (
        f"default-src 'none'; style-src '{_digest(style)}'; script-src '{_digest(program)}'; "
        "base-uri 'none'; form-action 'none'"
    )
    return (
        '<head>\n<meta charset="utf-8">\n'
        f'<meta http-equiv="Content-Security-Policy" content="{policy}">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        f"<title>{said(words.headline(verdict))}</title>\n<style>{style}</style>\n</head>\n"
    )


def _contents(sections: Sequence[Section]) -> str:
    links = [f'<li><a href="#{each.name}">{each.title} ({len(each.judged)})</a></li>' for each in sections]
    links += ['<li><a href="#closing">What was not checked</a></li>']
    return f'<nav aria-label="Contents"><ul>{"".join(links)}</ul></nav>\n'


def _claims(sections: Sequence[Section], shared: Shared) -> str:
    texts, number = [], 0
    for section in sections:
        texts.append(f'<section class="claims" aria-labelledby="{section.name}">\n')
        texts.append(f'<h2 id="{section.name}">{section.title} ({len(section.judged)})</h2>\n')
        unfolded = max(0, _MOST_UNFOLDED - number) if section.unfolded else 0
        told = [
            claim(one, each, shared, in_full=each < number + unfolded, drawn=each < _MOST_DRAWN)
            for each, one in enumerate(section.judged, number)
        ]
        texts += [*told[:unfolded], *_together(told[unfolded:]), "</section>\n"]
        number += len(told)
    return "".join(texts)


def _together(folded: Sequence[str]) -> Iterator[str]:
    for first in range(0, len(folded), _TOGETHER):
        yield f'<div class="part">\n{"".join(folded[first : first + _TOGETHER])}</div>\n'


def _program() -> str:
    return _own_text("shown.js") + _own_text("page.js")


def _own_text(name: str) -> str:
    """A file of the page without its comments of whole lines and its indents."""
    lines = (line.strip() for line in (_FOLDER / name).read_text(encoding="utf-8").splitlines())
    return "\n".join(line for line in lines if line and not line.startswith("//")) + "\n"


def _digest(text: str) -> str:
    """The hash by which the page allows a style or a program, as the security policy of content writes it."""
    return f"sha256-{base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()}"
