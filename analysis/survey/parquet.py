"""Parquet files of readings as CSV text, a few row groups at a time."""

from __future__ import annotations

import io
from typing import TYPE_CHECKING, Any, Final

from analysis.errors import CsvError
from analysis.files.columns import BY_NAME, DIP_DIRECTION, Kind

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

_ROWS_IN_PART: Final = 500_000
_ROWS_IN_TEXT: Final = 32_768
_TEXT_KINDS: Final = (Kind.NAME, Kind.TEXT, Kind.WORD, Kind.WORDS)


def is_parquet(path: Path) -> bool:
    """Whether a file is Parquet, by its name."""
    return path.suffix.lower() in (".parquet", ".pq")


def _opened(path: Path) -> Any:  # noqa: ANN401 - pyarrow has no types
    try:
        import pyarrow as pa  # noqa: PLC0415 - only where a survey reads Parquet
        from pyarrow import parquet  # noqa: PLC0415
    except ImportError as error:  # pragma: no cover - the desk extra brings it
        raise CsvError(
            "reading Parquet needs pyarrow", where=str(path), mend="Install hingewise with its desk extra."
        ) from error
    try:
        return parquet.ParquetFile(path)
    except (OSError, pa.ArrowException) as error:
        raise CsvError(f"cannot be read: {error}", where=str(path), expected="a Parquet file") from error


def columns_of(path: Path) -> tuple[str, ...]:
    """Names of the columns of a Parquet file."""
    with _opened(path) as file:
        return tuple(file.schema_arrow.names)


def parquet_parts(path: Path) -> tuple[list[tuple[tuple[int, ...], int]], bool]:
    """Cut a Parquet file into parts of whole row groups.

    Returns
    -------
    parts, some_without_id
        (row groups, number of the first row) of each part; whether some rows may lack a reading_id.

    """
    with _opened(path) as file:
        metadata = file.metadata
        names = [metadata.schema.column(place).path for place in range(metadata.num_columns)]
        place = names.index("reading_id") if "reading_id" in names else None
        parts: list[tuple[tuple[int, ...], int]] = []
        some_without_id = place is None
        groups: list[int] = []
        first = rows = 0
        for group in range(metadata.num_row_groups):
            about = metadata.row_group(group)
            if place is not None:
                statistics = about.column(place).statistics
                known = (
                    statistics is not None and statistics.has_null_count and statistics.has_min_max
                ) or about.num_rows == 0
                some_without_id |= not known or (
                    about.num_rows > 0 and (statistics.null_count > 0 or not str(statistics.min).strip())
                )
            groups.append(group)
            rows += about.num_rows
            if rows >= _ROWS_IN_PART or group == metadata.num_row_groups - 1:
                parts.append((tuple(groups), first))
                first, rows, groups = first + rows, 0, []
        return parts, some_without_id


def parquet_texts(path: Path, row_groups: tuple[int, ...]) -> Iterator[bytes]:
    """Give the rows of some row groups as CSV with a header line each, some ten thousand rows at a time."""
    import pyarrow as pa  # noqa: PLC0415 - as above
    from pyarrow import csv  # noqa: PLC0415

    with _opened(path) as file:
        empty = True
        try:
            for batch in file.iter_batches(_ROWS_IN_TEXT, row_groups=list(row_groups)):
                empty = False
                stream = io.BytesIO()
                csv.write_csv(_as_text(batch, path), stream)
                yield stream.getvalue()
        except (OSError, pa.ArrowException) as error:
            raise CsvError(f"cannot be read: {error}", where=str(path), expected="a Parquet file") from error
        if empty:
            yield (",".join(f'"{name}"' for name in file.schema_arrow.names) + "\n").encode()


def _as_text(batch: Any, path: Path) -> Any:  # noqa: ANN401 - pyarrow has no types
    """Make all that CSV has no way to write into what the reader of CSV takes."""
    import pyarrow as pa  # noqa: PLC0415 - as above
    import pyarrow.compute as pc  # noqa: PLC0415

    columns = []
    for name, column in zip(batch.schema.names, batch.columns, strict=True):
        made = column.dictionary_decode() if pa.types.is_dictionary(column.type) else column
        kind = made.type
        ours = DIP_DIRECTION if name == DIP_DIRECTION.name else BY_NAME.get(name)
        if pa.types.is_boolean(kind):
            made = pc.if_else(made, "yes", "no")
        elif pa.types.is_floating(kind):
            made = pc.if_else(pc.is_nan(made), pa.scalar(None, kind), made)
        elif pa.types.is_timestamp(kind):
            # A time without zone is no moment: it is handed on as it stands, and the reader says so.
            form = "%Y-%m-%dT%H:%M:%SZ" if kind.tz else "%Y-%m-%dT%H:%M:%S"
            moment = made.cast(pa.timestamp("ms", "UTC" if kind.tz else None), safe=False)
            made = pc.strftime(moment, format=form)
        elif pa.types.is_string(kind) or pa.types.is_large_string(kind) or kind == pa.string_view():
            if ours is None or ours.kind in _TEXT_KINDS:
                made = pc.replace_substring_regex(made, r"\A('*[=+\-@\t\r\n])", r"'\1")
        elif not (pa.types.is_integer(kind) or pa.types.is_null(kind)):
            try:
                made = made.cast(pa.string())
            except pa.ArrowException as error:
                raise CsvError(
                    f"the column {name} holds {kind}",
                    where=str(path),
                    expected="numbers, text, times or flags",
                ) from error
        columns.append(made)
    return pa.record_batch(columns, names=batch.schema.names)
