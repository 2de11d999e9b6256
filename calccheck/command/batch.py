"""One task over many sheets: a fault in one leaves the others alone, several processes share the work, a bar shows it."""

from __future__ import annotations

import os
import sys
import time
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import Generic, TypeVar

from calccheck.command.files import Unusable

TRACEBACK = "CALCCHECK_TRACEBACK"  # environment variable: show where an internal fault arose

Item = TypeVar("Item")
Done = TypeVar("Done")


@dataclass(frozen=True, slots=True)
class Outcome(Generic[Done]):
    """What came of one sheet: a value, or the problem that kept it from being one (``name: reason``)."""

    value: Done | None
    problem: str = ""


@dataclass(frozen=True, slots=True)
class _Guarded(Generic[Item, Done]):
    """The task with its exceptions caught, in a form that can be sent to another process."""

    task: Callable[[Item], Done]
    name: Callable[[Item], str]

    def __call__(self, item: Item) -> Outcome[Done]:
        try:
            return Outcome(self.task(item))
        except Unusable as problem:
            return Outcome(None, str(problem))
        except Exception as fault:  # whatever goes wrong inside concerns this sheet alone
            return Outcome(None, internal_fault(self.name(item), fault))


def internal_fault(name: str, fault: BaseException) -> str:
    """A bug, said in one line; with the traceback where the environment asks for it."""
    told = f"{name}: internal fault ({type(fault).__name__}: {fault}); please report it, {TRACEBACK}=1 shows where it arose"
    if os.environ.get(TRACEBACK):
        import traceback  # late: only for whoever looks for the bug

        told += "\n" + "".join(traceback.format_exception(fault))
    return told


def run(
    task: Callable[[Item], Done], items: Sequence[Item], name: Callable[[Item], str], jobs: int = 1
) -> Iterator[Outcome[Done]]:
    """The outcome of every item, in order. ``task`` and ``name`` are module-level functions; ``jobs``: processes at most."""
    guarded = _Guarded(task, name)
    outcomes = _in_processes(guarded, items, jobs) if min(jobs, len(items)) > 1 else map(guarded, items)
    return _with_bar(outcomes, len(items))


def _in_processes(guarded: _Guarded[Item, Done], items: Sequence[Item], jobs: int) -> Iterator[Outcome[Done]]:
    """The outcomes by several processes. A process that dies takes its pool along: what was left is done one by one."""
    from concurrent.futures import ProcessPoolExecutor  # late: a hook checks a few sheets in one process
    from concurrent.futures.process import BrokenProcessPool
    from multiprocessing import get_context

    done = 0
    context = get_context("spawn") if "typst" in sys.modules else None  # the threads it has begun do not outlive a fork
    pool = ProcessPoolExecutor(min(jobs, len(items)), context, _leave_interrupts_to_the_parent)
    try:
        for future in [pool.submit(guarded, item) for item in items]:
            yield future.result()
            done += 1
    except BrokenProcessPool:
        for item in items[done:]:
            try:
                with ProcessPoolExecutor(1, context) as alone:
                    yield alone.submit(guarded, item).result()
            except BrokenProcessPool as fault:  # killed, or out of memory
                yield Outcome(None, internal_fault(guarded.name(item), fault))
    finally:
        pool.shutdown(wait=True, cancel_futures=True)  # an interrupt ends the sheets in hand and begins no other


def _leave_interrupts_to_the_parent() -> None:
    """An interrupt from the keyboard reaches every process of the group; one of them is to answer it."""
    import signal

    signal.signal(signal.SIGINT, signal.SIG_IGN)


def _with_bar(outcomes: Iterable[Outcome[Done]], total: int) -> Iterator[Outcome[Done]]:
    """The same outcomes; work of more than a second shows a bar on standard error if that is a terminal."""
    shown = total > 1 and sys.stderr.isatty()
    start, width, drawn = time.monotonic(), 30, False
    for done, outcome in enumerate(outcomes, 1):
        if shown and time.monotonic() - start > 1:
            filled = width * done // total
            sys.stderr.write(f"\r[{'#' * filled}{' ' * (width - filled)}] {done} of {total} sheets")
            sys.stderr.flush()
            drawn = True
        yield outcome
    if drawn:
        sys.stderr.write("\r\x1b[K")
        sys.stderr.flush()
