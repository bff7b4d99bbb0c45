"""A thread that does jobs one after another, with few of them waiting."""

from collections.abc import Callable
from queue import Queue
from threading import Thread
from typing import Final

__all__ = ["LOOK_AHEAD", "Lane"]

LOOK_AHEAD: Final = 2  # jobs that wait; more would only hold memory


class Lane:
    """Does jobs in the order in which they are given, beside the caller.

    After the first job that fails the others are dropped, and its error reaches the
    caller at the next `put` or at `finish`.

    Parameters
    ----------
    name : str
        Name of the thread.
    """

    def __init__(self, name: str) -> None:
        self._jobs: Queue[Callable[[], None] | None] = Queue(LOOK_AHEAD)
        self._error: BaseException | None = None
        self._stopped = False
        self._thread = Thread(target=self._work, name=name, daemon=True)
        self._thread.start()

    def put(self, job: Callable[[], None]) -> None:
        """Add a job; waits while as many as `LOOK_AHEAD` are waiting.

        Raises
        ------
        BaseException
            What an earlier job failed with.
        """
        self._raise()
        self._jobs.put(job)

    def finish(self) -> None:
        """Wait until every job is done.

        Raises
        ------
        BaseException
            What a job failed with.
        """
        self._end()
        self._raise()

    def abandon(self) -> None:
        """Drop the jobs that wait, and wait for the one that runs."""
        self._stopped = True
        self._end()

    def _end(self) -> None:
        if self._thread.is_alive():
            self._jobs.put(None)
            self._thread.join()

    def _raise(self) -> None:
        if self._error is not None:
            raise self._error

    def _work(self) -> None:
        while (job := self._jobs.get()) is not None:
            if self._stopped or self._error is not None:
                continue
            try:
                job()
            except BaseException as error:
                self._error = error
