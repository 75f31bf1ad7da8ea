"""Parts of a computation on a pool of threads, which can be stopped.

The compiled functions release the interpreter's lock, so that threads are enough.
"""

from __future__ import annotations

import os
from collections.abc import Callable
from concurrent.futures import FIRST_COMPLETED, ThreadPoolExecutor, wait
from threading import Event

from engine.errors import Cancelled, Progress, stop_if

#: Seconds between two looks at whether to stop.
_PATIENCE = 0.05


def on_pool(
    count: int,
    run: Callable[[int], None],
    cancelled: Cancelled | None = None,
    progress: Progress | None = None,
) -> None:
    """Run the parts 0 to count - 1, which take a moment each.

    Raises
    ------
    ComputationCancelled
        When `cancelled` says so; it is asked, as `progress` is told, by the caller's
        thread.
    """
    stop_if(cancelled)
    if count == 1:
        run(0)
        stop_if(cancelled)
        if progress is not None:
            progress(1.0, "summing the field")
        return
    stopped = Event()

    def run_unless_stopped(index: int) -> None:
        if not stopped.is_set():
            run(index)

    done = 0
    with ThreadPoolExecutor(_threads(), thread_name_prefix="field") as pool:
        pending = {pool.submit(run_unless_stopped, index) for index in range(count)}
        try:
            while pending:
                finished, pending = wait(pending, _PATIENCE, FIRST_COMPLETED)
                for future in finished:
                    future.result()
                done += len(finished)
                stop_if(cancelled)
                if progress is not None and finished:
                    progress(done / count, "summing the field")
        except BaseException:
            stopped.set()
            pool.shutdown(wait=True, cancel_futures=True)
            raise


def _threads() -> int:
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1
