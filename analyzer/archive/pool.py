"""Running jobs: in this process, in worker processes, or on a Dask cluster, always through the same `work`."""

from __future__ import annotations

import multiprocessing
from collections.abc import Iterable, Iterator
from concurrent.futures import FIRST_COMPLETED, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool

from analyzer.archive.work import INTERNAL_FAULT, Job, Outcome, work

DIED = "the worker process died on this board (out of memory, or killed)"


def run(jobs: Iterable[Job], workers: int) -> Iterator[Outcome]:
    """Outcomes of `jobs` as they finish; at most `workers` boards are in flight, so memory stays flat.

    A worker process that dies takes only its own board with it: what was in flight is tried again, one board
    at a time, and the one that kills its worker again is reported as failed.
    """
    if workers <= 1:
        yield from map(work, jobs)
        return
    waiting = iter(jobs)
    suspects: list[Job] = []
    broken = True
    while broken:
        broken = False
        flying: dict[str, Job] = {}
        with _pool(workers) as pool:
            try:
                yield from _fly(pool, waiting, flying, workers)
            except BrokenProcessPool:
                suspects += flying.values()
                broken = True
    for job in suspects:
        yield _alone(job)


def _fly(pool: ProcessPoolExecutor, waiting: Iterator[Job], flying: dict[str, Job], workers: int) -> Iterator[Outcome]:
    futures: set[Future[Outcome]] = set()
    for job in waiting:
        # noted before it is handed over: a pool may break while taking it
        flying[job.label] = job
        futures.add(pool.submit(work, job))
        if len(futures) > workers:
            yield from _landed(futures, flying)
    while futures:
        yield from _landed(futures, flying)


def _landed(futures: set[Future[Outcome]], flying: dict[str, Job]) -> Iterator[Outcome]:
    done, _ = wait(futures, return_when=FIRST_COMPLETED)
    for future in done:
        outcome = future.result()
        futures.remove(future)
        del flying[outcome.label]
        yield outcome


def _alone(job: Job) -> Outcome:
    with _pool(1) as pool:
        try:
            return pool.submit(work, job).result()
        except BrokenProcessPool:
            return Outcome(job.label, INTERNAL_FAULT, fault=DIED)


def _pool(workers: int) -> ProcessPoolExecutor:
    # "spawn" starts each worker clean on every platform; forked copies would inherit the progress display's thread
    return ProcessPoolExecutor(workers, mp_context=multiprocessing.get_context("spawn"))


def run_on_cluster(jobs: Iterable[Job], address: str) -> Iterator[Outcome]:
    """Outcomes of `jobs` run on the Dask cluster at `address`, as they finish.

    The cluster's machines must see the same files under the same paths and have this program installed.

    Raises:
        UsageError: If the optional package is not installed.
        InputError: If the cluster does not answer.
    """
    from analyzer.errors import Fault, InputError, UsageError

    try:
        from distributed import Client, as_completed
    except ImportError as error:
        remedy = "Install the optional extra: pip install 'heatledger[cluster]'."
        raise UsageError(Fault("--cluster needs the package 'distributed'", remedy=remedy)) from error
    try:
        client = Client(address, timeout="10s")
    except (OSError, ValueError, TimeoutError) as error:
        raise InputError(Fault(f"no cluster answers ({error})", address, remedy="Check the address.")) from error
    with client:
        by_future = {client.submit(work, job, pure=False): job for job in jobs}
        for future in as_completed(by_future):
            if future.status == "finished":
                yield future.result()
            else:
                yield Outcome(by_future[future].label, INTERNAL_FAULT, fault=DIED)
            future.release()
