"""Control-C heard between two captures, so that it neither gets lost nor cuts a commit in two."""

from __future__ import annotations

import signal
import threading
from types import FrameType, TracebackType
from typing import Any, Self


class Interrupts:
    """While entered, a first interruption waits for `check`; a second one comes at once.

    Python drops a KeyboardInterrupt that arrives within a destructor, and there are many of them in
    the writing of a file: the work would go on as if nothing had been pressed.

    Examples
    --------
    >>> with Interrupts() as interrupts:
    ...     interrupts.check()        # nothing was pressed
    """

    def __init__(self) -> None:
        self._pressed = False
        self._before: Any = None

    def __enter__(self) -> Self:
        # Python hands signals to the main thread only; elsewhere there is nothing to hear.
        if threading.current_thread() is threading.main_thread():
            self._before = signal.signal(signal.SIGINT, self._hear)
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        if self._before is not None:
            signal.signal(signal.SIGINT, self._before)
        if kind is None:
            self.check()

    def _hear(self, number: int, frame: FrameType | None) -> None:
        if self._pressed:
            raise KeyboardInterrupt
        self._pressed = True

    def check(self) -> None:
        """Raise the KeyboardInterrupt that has come since."""
        if self._pressed:
            raise KeyboardInterrupt
