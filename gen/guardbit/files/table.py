"""Comma-separated tables of exact numbers."""

import json
from fractions import Fraction

from guardbit.files.numbers import NotExactError, exact
from guardbit.files.reading import decode, refusal
from guardbit.model.spec import Matrix


def parse_csv(data: bytes, name: str, limit: int) -> Matrix:
    """Return the rows of a table whose cells are decimals ("0.25") or ratios ("1/16").

    Blank lines and lines that begin with "#" are left out. Raises SpecError for text that is
    not UTF-8, an empty or ragged table, one of over `limit` rows or columns, and a cell
    that is no exact number.
    """
    lines = enumerate(map(str.strip, decode(data, name).split("\n")), start=1)
    rows = [(at, line.split(",")) for at, line in lines if line and not line.startswith("#")]
    if not rows:
        raise refusal("csv-empty", name)
    columns = len(rows[0][1])
    if len(rows) > limit or columns > limit:
        raise refusal("array-too-large", name, rows=len(rows), columns=columns, limit=limit)
    return tuple(_row(cells, at, columns, name) for at, cells in rows)


def _row(cells: list[str], at: int, columns: int, name: str) -> tuple[Fraction, ...]:
    if len(cells) != columns:
        raise refusal("csv-ragged", name, line=at, row=at, got=len(cells), expected=columns)
    return tuple(_cell(cell, at, number, name) for number, cell in enumerate(cells, start=1))


def _cell(cell: str, at: int, number: int, name: str) -> Fraction:
    try:
        return exact(cell)
    except NotExactError as error:
        got = json.dumps(cell.strip()[:40])
        raise refusal(
            "csv-cell", name, line=at, row=at, column=number, got=got, why=error.reason
        ) from None
