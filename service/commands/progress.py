"""How far a long command is: a bar on a terminal, else a line at each tenth."""

import time
from typing import TextIO

BAR_WIDTH = 30  # characters
CLEAR_ON = "\x1b[K"  # clears the line from here on (ECMA-48 section 8.3.41)


class Progress:
    """Says how far a command is, on the stream of errors: what the command gives stays apart from it."""

    def __init__(self, count: int, out: TextIO) -> None:
        """Begin.

        Args:
            count: How many things there are to do.
            out: Where it is said; a bar is drawn where it is a terminal.
        """
        self._count = count
        self._out = out
        self._is_terminal = out.isatty()
        self._begun_s = time.monotonic()
        self._done = self._worked = 0

    def tell(self, *, is_work: bool) -> None:
        """One more is done.

        Args:
            is_work: Whether it took work, from which the time left is guessed; no where it was done before.
        """
        self._done += 1
        self._worked += is_work
        if self._is_terminal:
            filled = BAR_WIDTH * self._done // self._count
            bar = "#" * filled + "." * (BAR_WIDTH - filled)
            self._write(
                f"\r[{bar}] {self._told()}\x1b[K"
            )  # and the rest of the line is cleared (ECMA-48 section 8.3.41)
        elif self._done * 10 // self._count > (self._done - 1) * 10 // self._count:
            self._write(f"{self._told()}\n")

    def end(self) -> None:
        """Leave the line of the bar."""
        if self._is_terminal and self._done:
            self._write("\n")

    def _told(self) -> str:
        left = self._count - self._done
        if not left or not self._worked:
            return f"{self._done} of {self._count}"
        left_s = (time.monotonic() - self._begun_s) / self._worked * left
        return f"{self._done} of {self._count}, about {left_s:.0f} s left"

    def _write(self, text: str) -> None:
        self._out.write(text)
        self._out.flush()
