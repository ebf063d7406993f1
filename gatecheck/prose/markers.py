"""The marker that ties prose to a record: `gatecheck: ID FIELD` in a comment, invisible when it is rendered."""

from __future__ import annotations

#: What every file with a marker has somewhere.
KEY = "gatecheck:"


def marker_in(comment: str) -> str | None:
    """Return what a comment of ours says, such as `yield/spring estimate.value`; of any other `None`."""
    bare = comment.strip()
    return bare.removeprefix(KEY).strip() if bare.startswith(KEY) else None
