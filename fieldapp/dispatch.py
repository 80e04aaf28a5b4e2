"""Work off the user's thread: a worker returns a value, and one place hops back with it."""

from __future__ import annotations

from typing import TYPE_CHECKING, Protocol, TypeVar

if TYPE_CHECKING:
    from collections.abc import Callable
    from concurrent.futures import Executor, Future

T = TypeVar("T")


class Dispatch(Protocol):
    """Runs `work` elsewhere; its value goes to `done`, its error to `failed`, on the user's thread."""

    def __call__(
        self, work: Callable[[], T], done: Callable[[T], None], failed: Callable[[Exception], None]
    ) -> None:
        """Start the work."""


def at_once(work: Callable[[], T], done: Callable[[T], None], failed: Callable[[Exception], None]) -> None:
    """Run the work on the spot: for commands and tests."""
    try:
        value = work()
    except Exception as error:  # noqa: BLE001 - whatever the work raised belongs to `failed`
        failed(error)
    else:
        done(value)


class ThreadDispatch:
    """Runs work on an executor; `hop` schedules a call on the user's thread (in the app: the Kivy clock)."""

    def __init__(self, executor: Executor, hop: Callable[[Callable[[], None]], None]) -> None:
        self._executor = executor
        self._hop = hop

    def __call__(
        self, work: Callable[[], T], done: Callable[[T], None], failed: Callable[[Exception], None]
    ) -> None:
        """Run `work` on the executor; see Dispatch."""

        def ended(future: Future[T]) -> None:
            if future.cancelled():  # the app is closing; nobody waits for it any more
                return
            error = future.exception()
            if isinstance(error, Exception):
                self._hop(lambda: failed(error))
            elif error is None:
                self._hop(lambda: done(future.result()))

        self._executor.submit(work).add_done_callback(ended)
