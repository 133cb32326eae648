"""One task after the other on several processes; a task that ends its process stops no other."""

import multiprocessing
import os
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor, as_completed
from concurrent.futures.process import BrokenProcessPool
from typing import Any, TypeVar

Task = TypeVar("Task")
Result = TypeVar("Result")


def available_processors() -> int:
    """How many processors this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


def in_parallel(
    work: Callable[[Task], Result],
    tasks: Sequence[Task],
    jobs: int,
    begin: Callable[..., None],
    arguments: tuple[Any, ...],
) -> Iterator[tuple[Task, Result | None]]:
    """Each task with its result as it is done, or with None where the process that worked on it died.

    `begin(*arguments)` prepares each process. With one job everything happens in this process. When one of
    several processes dies the tasks that it leaves open are taken up again, each in a process of its own.
    """
    if jobs <= 1 or len(tasks) <= 1:
        begin(*arguments)
        yield from ((task, work(task)) for task in tasks)
        return
    lost: list[Task] = []
    with _pool(min(jobs, len(tasks)), begin, arguments) as pool:
        futures = {pool.submit(work, task): task for task in tasks}
        try:
            for future in as_completed(futures):
                try:
                    yield futures[future], future.result()
                except BrokenProcessPool:
                    lost.append(futures[future])
        finally:
            pool.shutdown(wait=False, cancel_futures=True)
    for task in lost:
        with _pool(1, begin, arguments) as pool:
            try:
                yield task, pool.submit(work, task).result()
            except BrokenProcessPool:
                yield task, None


def _pool(jobs: int, begin: Callable[..., None], arguments: tuple[Any, ...]) -> ProcessPoolExecutor:
    # New processes, not forks: a library may have started threads in this one.
    context = multiprocessing.get_context("spawn")
    return ProcessPoolExecutor(jobs, mp_context=context, initializer=begin, initargs=arguments)
