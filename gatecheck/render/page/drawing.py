"""Drawings as templates and what fills them, so that a page of thousands holds the templates once."""

from __future__ import annotations

import re
from collections.abc import Sequence

#: What fills the slots ``{0}``, ``{1}`` ... of a template: numbers, path data and labels that are escaped already.
Drawing = list[int | str]

#: Path data that draws nothing.
NOTHING = "M0,0"

_SLOT = re.compile(r"\{(\d)\}")


def filled(template: str, values: Sequence[int | str]) -> str:
    """Return the template with its slots filled, as `page.js` fills it for a record that is opened."""
    return _SLOT.sub(lambda slot: str(values[int(slot[1])]), template)
