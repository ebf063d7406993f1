"""How long work says how far it has come, to whoever may want to know."""

from __future__ import annotations

from collections.abc import Callable

#: Takes a sentence with places for two numbers, such as `Reading {:,} of {:,} files`, how much is done, and of how
#: much. It is called as often as the work likes, and so costs next to nothing.
Progress = Callable[[str, int, int], None]
