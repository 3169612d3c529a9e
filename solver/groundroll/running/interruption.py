"""Ctrl-C while stepping: noted when it comes, obeyed between two passes.

Python would raise KeyboardInterrupt wherever it happens to be, in the middle of a write, or in a callback of
its own that swallows exceptions, so that the run would go on. A second Ctrl-C is raised at once.
"""

import signal
import threading


class Interruption:
    """Context manager; `obey()` raises KeyboardInterrupt once the user has pressed Ctrl-C.

    Where Ctrl-C is handled by somebody else already, or outside the main thread, it changes nothing.
    """

    def __init__(self):
        self._asked, self._ours = False, False

    def __enter__(self):
        main = threading.current_thread() is threading.main_thread()
        if main and signal.getsignal(signal.SIGINT) is signal.default_int_handler:
            self._ours = True
            signal.signal(signal.SIGINT, self._note)
        return self

    def __exit__(self, *_):
        if self._ours:
            signal.signal(signal.SIGINT, signal.default_int_handler)

    def _note(self, number, frame) -> None:
        self._asked = True
        signal.signal(number, signal.default_int_handler)

    def obey(self) -> None:
        if self._asked:
            raise KeyboardInterrupt
