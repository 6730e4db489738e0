"""Questions put to all receptors, chunk by chunk, on all cores; what is answered already is not asked."""

from __future__ import annotations

import os
import threading
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Future, ThreadPoolExecutor, wait
from dataclasses import dataclass
from typing import Protocol

from numpy.typing import NDArray

from insol.casting.contract import Caster
from insol.visibility.asking import CheckStop
from insol.visibility.receptors import Receptors
from insol.visibility.store import Store

LARGEST_CHUNK, SMALLEST_CHUNK, CHUNKS = 8192, 2048, 16
"""Receptors of a chunk: casts long enough to hide what Python costs, memory of some tens of MB a
thread; and chunks enough to keep every core at work to the end."""

POLL_S = 0.2
"""How often waiting looks up: Ctrl-C is heard within this time."""


class Question(Protocol):
    """Something the sky is asked."""

    @property
    def name(self) -> str: ...

    @property
    def rays_per_receptor(self) -> float: ...

    def answer(self, caster: Caster, receptors: Receptors, check_stop: CheckStop) -> dict[str, NDArray]: ...


class Stopped(Exception):
    """Raised inside a worker when the run is to end."""


@dataclass(frozen=True)
class Tally:
    """What answering had to do."""

    asked: int  # chunks cast in this run
    found: int  # chunks that were stored already


def chunk_size(count: int) -> int:
    """Receptors of a chunk, a multiple of eight: it hangs on their number alone, never on the machine."""
    even = -(-count // CHUNKS)
    return min(max(-(-even // 8) * 8, SMALLEST_CHUNK), LARGEST_CHUNK)


def chunks_of(count: int, size: int) -> Iterator[tuple[int, slice]]:
    """Number and range of each chunk of `count` receptors; one empty chunk of none."""
    for number, first in enumerate(range(0, max(count, 1), size)):
        yield number, slice(first, min(first + size, count))


def answer_all(
    questions: Sequence[Question],
    caster: Caster,
    receptors: Receptors,
    store: Store,
    *,
    threads: int | None = None,
    progress: Callable[[float, float], None] | None = None,
) -> Tally:
    """Answer every question for every receptor and store the answers.

    Parameters
    ----------
    threads : how many casts run at once; all cores by default. The answers do not depend on it.
    progress : told rays done and rays in all, estimated

    Raises
    ------
    KeyboardInterrupt
        Passed on within a second; whole chunks stay stored.
    """
    chunks = list(chunks_of(len(receptors), chunk_size(len(receptors))))
    wanted = [(question, number, run) for question in questions for number, run in chunks]
    missing = [item for item in wanted if not store.has(item[0].name, item[1])]
    total = sum(question.rays_per_receptor * (run.stop - run.start) for question, _, run in missing)
    stop = threading.Event()

    def check_stop() -> None:
        if stop.is_set():
            raise Stopped

    def work(question: Question, number: int, run: slice) -> float:
        arrays = question.answer(caster, receptors.piece(run.start, run.stop), check_stop)
        store.write(question.name, number, arrays)
        return question.rays_per_receptor * (run.stop - run.start)

    pool = ThreadPoolExecutor(max_workers=threads or usable_cores())
    try:
        _collect([pool.submit(work, *item) for item in missing], total, progress)
    finally:
        stop.set()
        pool.shutdown(wait=True, cancel_futures=True)
    for question in questions:
        store.close_question(question.name, {"question": question.name, "chunks": len(chunks)})
    return Tally(asked=len(missing), found=len(wanted) - len(missing))


def _collect(futures: Sequence[Future[float]], total: float, progress: Callable[[float, float], None] | None) -> None:
    """Wait for all work, telling how far it is, and raise the first failure at once."""
    waiting, done = set(futures), 0.0
    while waiting:
        finished, waiting = wait(waiting, timeout=POLL_S, return_when=FIRST_COMPLETED)
        done += sum(future.result() for future in finished)
        if progress is not None:
            progress(done, total)


def usable_cores() -> int:
    """The cores this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1
