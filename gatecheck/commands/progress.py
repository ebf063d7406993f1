"""How far long work has come: one line at a terminal, rewritten in place and gone at the end."""

from __future__ import annotations

import contextlib
from threading import Event, Thread

TYPE_CHECKING = False  # a type checker reads it as true; `typing` itself would cost start-up time
if TYPE_CHECKING:
    from types import TracebackType
    from typing import Self, TextIO

#: In seconds: work that is done earlier shows nothing, and later the line is rewritten at most so often.
FIRST, EVERY = 1.0, 0.1


class ProgressLine:
    """A line on `stream`, `columns` wide, for the time of a `with` statement; see `gatecheck.model.progress`.

    A thread of its own writes it, so that the work only leaves a note of where it is, and a step that takes long is
    shown while it lasts.
    """

    def __init__(self, stream: TextIO, columns: int, first: float = FIRST, every: float = EVERY) -> None:
        self._stream, self._columns = stream, columns
        self._first, self._every = first, every
        self._noted: tuple[str, int, int] = ("", 0, 0)
        self._ended = Event()
        self._writer = Thread(target=self._write, daemon=True)

    def __call__(self, sentence: str, done: int, of: int) -> None:
        """Note how far the work has come."""
        self._noted = (sentence, done, of)

    def __enter__(self) -> Self:
        self._writer.start()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, raised: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._ended.set()
        self._writer.join()

    def _write(self) -> None:
        """Write the line until the work ends; a stream that has gone ends it earlier."""
        with contextlib.suppress(OSError, ValueError):
            wait, shown = self._first, ""
            while not self._ended.wait(wait):
                wait, line = self._every, self._line()
                if line != shown:
                    self._put(line + " " * (len(shown) - len(line)))
                    shown = line
            if shown:
                self._put(" " * len(shown) + "\r")

    def _line(self) -> str:
        sentence, done, of = self._noted
        # In the last column some terminals go on to the next line, which could not be rewritten.
        return sentence.format(done, of)[: self._columns - 1]

    def _put(self, text: str) -> None:
        self._stream.write(f"\r{text}")
        self._stream.flush()
