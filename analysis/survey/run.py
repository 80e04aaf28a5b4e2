"""A survey on Dask: every part scanned, their sums added in a tree, every fold or square checked.

Threads of this process do the work, or a Dask cluster given by its address, whose workers must see the files under
the same paths and have this package installed. The order of addition is fixed by the parts alone, so the number of
workers changes no figure.
"""

from __future__ import annotations

import os
from contextlib import contextmanager, nullcontext
from dataclasses import dataclass
from functools import reduce
from operator import add, itemgetter
from typing import TYPE_CHECKING, Any, Final, TextIO

import numpy as np

from analysis.errors import SettingError
from analysis.fold.check import check_fold
from analysis.fold.settings import CheckSettings
from analysis.survey import repeats
from analysis.survey.archive import find_archive, readings_at
from analysis.survey.scan import scan_part, sums_at
from analysis.survey.squares import Grid, position_of
from analysis.survey.verdicts import mean_rows, together, verdict_row

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator, Sequence

    from analysis.files.faults import RowFault
    from analysis.files.standing import Conflict
    from analysis.stats.manysums import ManySums
    from analysis.survey.archive import Archive
    from analysis.survey.repeats import Rows
    from analysis.survey.scan import Scan
    from analysis.survey.verdicts import Means, Row

    Compute = Callable[[list[Any], str], list[Any]]

_ADDED_AT_ONCE: Final = 4  # sums that one task adds; few, so that few are in memory
_CHECKS_IN_TASK: Final = 100
_CONNECT_SECONDS: Final = 20
DEFAULT: Final = CheckSettings()


@dataclass(frozen=True, slots=True)
class Survey:
    """What a survey found, as rows of a map, and what was left out.

    `verdicts` has a row a fold or square, `means` rows of the mean attitudes by the name of their layer.
    """

    verdicts: tuple[Row, ...]
    means: dict[str, list[Row]]
    readings: int  # that stand and were used
    rows_read: int
    unplaced: int  # rows without position, which no square holds; 0 in a survey by fold
    faulty_rows: int
    faults: tuple[RowFault, ...]
    conflicts: tuple[Conflict, ...]


def survey(
    paths: Iterable[str | os.PathLike[str]],
    settings: CheckSettings = DEFAULT,
    *,
    grid: Grid | None = None,
    workers: int | None = None,
    scheduler: str | None = None,
    progress: TextIO | None = None,
) -> Survey:
    """Check every fold of an archive of CSV and Parquet files, or every square of a grid.

    Parameters
    ----------
    paths
        Files, and folders that are searched for files.
    grid
        Squares, or moving windows, in place of folds.
    workers
        Threads; None takes one a processor.
    scheduler
        Address of a Dask scheduler, in place of threads.
    progress
        Where a progress bar is drawn.

    Raises
    ------
    CsvError
        For a file that is none of readings.
    SettingError
        Where there is no file, Dask is missing, or no scheduler answers.

    """
    # Workers elsewhere were started in folders of their own.
    archive = find_archive(paths if scheduler is None else map(os.path.abspath, paths))
    with _computing(workers, scheduler, progress) as compute:
        total, scans = _scan(archive, grid, compute)
        total, conflicts = _without_repeats(total, scans, grid, compute)
        checked = _check(total, settings, grid, compute)
    return Survey(
        verdicts=tuple(verdict for verdict, _ in checked),
        means=together(means for _, means in checked),
        readings=total.count(),
        rows_read=sum(scan.rows for scan in scans),
        unplaced=0 if grid is None else sum(scan.unplaced for scan in scans),
        faulty_rows=sum(scan.faulty_rows for scan in scans),
        faults=tuple(fault for scan in scans for fault in scan.faults),
        conflicts=tuple(conflicts),
    )


def _scan(archive: Archive, grid: Grid | None, compute: Compute) -> tuple[ManySums, list[Scan]]:
    from dask import delayed  # noqa: PLC0415 - loaded only for a survey

    scanned = [delayed(scan_part)(part, grid, ids_matter=archive.ids_matter) for part in archive.parts]
    level = [delayed(itemgetter(0))(one) for one in scanned]
    while len(level) > 1:
        level = [
            delayed(sum_of)(level[start : start + _ADDED_AT_ONCE])
            for start in range(0, len(level), _ADDED_AT_ONCE)
        ]
    total, *scans = compute([level[0], *(delayed(itemgetter(1))(one) for one in scanned)], "reading")
    return total, scans


def sum_of(many: Sequence[ManySums]) -> ManySums:
    """Add sums, one after another, so that no more than two results are in memory."""
    return reduce(add, many)


def _without_repeats(
    total: ManySums, scans: list[Scan], grid: Grid | None, compute: Compute
) -> tuple[ManySums, list[Conflict]]:
    """Take back the rows that do not count."""
    from dask import delayed  # noqa: PLC0415 - as above

    def fetched(task: Callable[..., Any], rows: Rows) -> dict[int, Any]:
        """Run a task on rows part by part; what it gives for each, by row."""
        places = repeats.by_part(rows, scans)
        found = compute(
            [delayed(task)(scans[at].part, places[at]) for at in places], "comparing repeated rows"
        )
        starts = np.concatenate([[0], np.cumsum([len(scan.hashes) for scan in scans])])
        return {
            int(starts[at] + row): value
            for at, values in zip(places, found, strict=True)
            for row, value in zip(places[at].tolist(), values, strict=True)
        }

    seen = repeats.find_repeats(scans)
    out = [seen.superseded]
    conflicts: list[Conflict] = []
    if len(seen.tied):
        ties = repeats.settle_copies(seen, fetched(repeats.digests_at, seen.tied))
        out.append(ties.copies)
        if ties.clashing:
            clashing = np.array(list(ties.clashing), dtype=np.int64)
            lost, conflicts = repeats.settle_clashes(ties.clashing, fetched(readings_at, clashing))
            out.append(lost)
    places = repeats.by_part(np.unique(np.concatenate(out)), scans)
    if places:
        tasks = [delayed(sums_at)(scans[at].part, rows, grid) for at, rows in places.items()]
        total = total - sum_of(compute(tasks, "taking back repeated rows"))
    return total, conflicts


def _check(
    total: ManySums, settings: CheckSettings, grid: Grid | None, compute: Compute
) -> list[tuple[Row, Means]]:
    from dask import delayed  # noqa: PLC0415 - as above

    groups = total.groups
    held = delayed(total, pure=False, traverse=False)
    found = compute(
        [
            delayed(check_groups)(held, groups[start : start + _CHECKS_IN_TASK], settings, grid)
            for start in range(0, len(groups), _CHECKS_IN_TASK)
        ],
        "checking",
    )
    return [pair for some in found for pair in some]


def check_groups(
    total: ManySums, groups: Sequence[str], settings: CheckSettings, grid: Grid | None
) -> list[tuple[Row, Means]]:
    """Check some folds or squares, and give the rows of the map: what is behind a check would fill the memory."""
    windows: dict[str, tuple[str, ...]] = {group: (group,) for group in groups}
    if grid is not None and grid.moving:
        held = frozenset(total.groups)
        windows = {group: grid.window_of(group, held) for group in groups}
    parts = total.split({member for members in windows.values() for member in members})
    found = []
    for group, members in windows.items():
        sums = reduce(add, (parts[member][0] for member in members))
        count, *vector = np.sum([parts[member][1] for member in members], axis=0)
        check = check_fold(sums, settings, fold=group)
        position = position_of(np.array(vector)) if grid is None else grid.centre_deg(group)
        verdict = verdict_row(check, position, round(count))
        found.append((verdict, mean_rows(check, verdict)))
    return found


@contextmanager
def _computing(workers: int | None, scheduler: str | None, progress: TextIO | None) -> Iterator[Compute]:
    """Give the function that computes delayed values, under a label."""
    if workers is not None and workers < 1:
        raise SettingError(f"{workers} workers can do nothing", where="--workers", expected="1 or more")
    try:
        import dask  # noqa: PLC0415 - as above
        from dask.diagnostics import ProgressBar  # noqa: PLC0415
    except ImportError as error:  # pragma: no cover - the desk extra brings it
        raise SettingError("a survey needs Dask", mend="Install hingewise with its desk extra.") from error
    if scheduler is not None:
        with _cluster(scheduler, progress) as compute:
            yield compute
        return

    def in_threads(tasks: list[Any], label: str) -> list[Any]:
        if progress is not None:
            progress.write(f"{label}\n")
        with ProgressBar(out=progress) if progress is not None else nullcontext():
            return list(dask.compute(*tasks))

    with dask.config.set(scheduler="threads", num_workers=workers):
        yield in_threads


@contextmanager
def _cluster(address: str, progress: TextIO | None) -> Iterator[Compute]:
    import asyncio  # noqa: PLC0415 - only where a cluster is asked for

    from distributed import Client, as_completed  # noqa: PLC0415 - as above

    try:
        # Tried first, for a client that cannot connect waits for itself and complains when it is let go.
        asyncio.run(_reach(address))
        client = Client(address, timeout=_CONNECT_SECONDS, set_as_default=False)
    except (ImportError, OSError, RuntimeError, TypeError, ValueError) as error:  # by scheme and transport
        raise SettingError(
            f"no Dask scheduler answers at {address}: {error}",
            where="--scheduler",
            expected="an address such as tcp://host:8786",
        ) from error

    def compute(tasks: list[Any], label: str) -> list[Any]:
        futures = client.compute(tasks)
        for done, _ in enumerate(as_completed(futures, loop=client.loop), start=1):
            if progress is not None:
                progress.write(f"\r{label}: {done} of {len(futures)} parts")
        if progress is not None:
            progress.write("\n")
        return list(client.gather(futures))

    with client:
        yield compute


async def _reach(address: str) -> None:
    """Connect to an address once, as a client does, and hang up."""
    from distributed.comm import connect  # noqa: PLC0415 - as above
    from distributed.security import Security  # noqa: PLC0415

    comm = await connect(address, timeout=_CONNECT_SECONDS, **Security().get_connection_args("client"))
    await comm.close()
