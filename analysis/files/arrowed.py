"""The text of a clean block parsed by the arrow library, in a third of the time that pandas takes.

For the desk: the app neither has arrow nor loads this. For a block with anything odd in it, or where there is no
arrow, the answer is None, and pandas parses the block (`analysis.files.frames`).
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from analysis.files.columns import Kind
from analysis.files.held import Distinct, is_coded

if TYPE_CHECKING:
    from collections.abc import Sequence

    from analysis.files.columns import Column
    from analysis.files.header import Header
    from analysis.files.held import Array, Parsed


def parse_clean(
    text: bytes, rows: int, header: Header, columns: Sequence[Column | None], decimal: str
) -> list[Parsed] | None:
    """Parse rows of as many cells as the header has; None where a cell is not what its column holds."""
    try:
        import pyarrow as pa  # noqa: PLC0415 - the desk has it
        from pyarrow import csv  # noqa: PLC0415
    except ImportError:
        return None
    try:
        table = csv.read_csv(
            pa.BufferReader(text),
            read_options=csv.ReadOptions(
                use_threads=False,
                block_size=len(text) + 1,
                column_names=[str(place) for place in range(len(columns))],
            ),
            parse_options=csv.ParseOptions(
                delimiter=header.delimiter, newlines_in_values=b'"' in text, ignore_empty_lines=False
            ),
            convert_options=csv.ConvertOptions(
                column_types={str(place): _type_of(column) for place, column in enumerate(columns)},
                null_values=[""],
                strings_can_be_null=False,
                decimal_point=decimal,
            ),
        )
    except pa.ArrowInvalid:
        return None
    if table.num_rows != rows:
        return None
    parsed: list[Parsed] = []
    for column in table.columns:
        cells = _parsed(column.chunk(0))
        if cells is None:
            return None
        parsed.append(cells)
    return parsed


def _type_of(column: Column | None) -> Any:  # noqa: ANN401 - arrow has no types for the checker
    import pyarrow as pa  # noqa: PLC0415 - only where it is there

    if column is None:
        return pa.string()
    if is_coded(column) or column.kind in (Kind.YES_NO, Kind.WHOLE):
        return pa.dictionary(pa.int32(), pa.string())
    return {Kind.NUMBER: pa.float64(), Kind.TIME: pa.timestamp("ms", tz="UTC")}.get(column.kind, pa.string())


def _parsed(chunk: Any) -> Parsed | None:  # noqa: ANN401 - as above
    import pyarrow as pa  # noqa: PLC0415 - only where it is there

    if isinstance(chunk, pa.DictionaryArray):
        return Distinct(chunk.indices.to_numpy(), chunk.dictionary.to_pylist())
    if pa.types.is_string(chunk.type):
        return chunk  # type: ignore[no-any-return]
    values: Array = chunk.to_numpy(zero_copy_only=False)
    # Words such as nan are numbers to arrow, and to nobody else.
    return values if int(np.count_nonzero(np.isnan(values))) == chunk.null_count else None
