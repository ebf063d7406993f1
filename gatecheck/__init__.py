"""Judge, on every pull request, whether each claimed finding rests on evidence strong enough."""

from __future__ import annotations

TYPE_CHECKING = False  # a type checker reads it as true; `typing` itself would cost start-up time
if TYPE_CHECKING:
    from gatecheck.declaring import declare

__version__ = "0.1.0"
__all__ = ["__version__", "declare"]


def __getattr__(name: str) -> object:
    """Load `declare` when analysis code asks for it; the command does without."""
    if name == "declare":
        from gatecheck.declaring import declare  # noqa: PLC0415  # loaded when it is asked for

        return declare
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
