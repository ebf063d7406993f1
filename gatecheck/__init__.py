"""Judge, on every pull request, whether each claimed finding rests on evidence strong enough."""

__version__ = "0.1.0"
