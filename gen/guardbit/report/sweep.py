"""The table of a sweep for a person, and for a spreadsheet."""

import csv
import io
from collections import Counter
from collections.abc import Sequence

from rich.table import Table
from rich.text import Text

from guardbit.model.decimals import lower, upper
from guardbit.model.sweep import ERROR_PLACES, Cost, Row, Sweep
from guardbit.report.heads import words
from guardbit.report.look import STYLES, Look, drawn
from guardbit.report.text import plural
from guardbit.report.wording import sentence

MOST_LISTED = 40

COLUMNS = (
    "coefficient_bits",
    "coefficient_frac",
    "intermediate_bits",
    "intermediate_frac",
    "rounding",
    "fit",
    "accumulator_bits",
    "bits",
    "error",
    "low",
    "high",
    "response",
    "front",
    "refused",
)


def sweep_text(look: Look, sweep: Sweep, every: bool = False) -> str:
    """Return the text of a sweep: its points from the fewest bits to the most.

    Beyond MOST_LISTED points only those of the Pareto front are listed, unless `every`.
    """
    held = sorted((row for row in sweep.rows if row.cost is not None), key=_rank)
    all_of_them = every or len(held) <= MOST_LISTED
    listed = [row for row in held if all_of_them or row.index in sweep.front]
    title = words(look, sweep.name, "bold").append(f"  {_counts(sweep, len(held))}")
    parts = [title, Text()]
    notes = [Text(f"  {note}") for note in _notes(sweep, len(held) - len(listed))]
    return drawn(look, *parts, *([_table(look, sweep, listed)] if listed else []), Text(), *notes)


def _rank(row: Row) -> tuple[object, ...]:
    assert row.cost is not None
    return row.cost.bits, row.cost.error, row.index


def _counts(sweep: Sweep, held: int) -> str:
    refused = len(sweep.rows) - held
    said = f"{plural(len(sweep.rows), 'point')}, {len(sweep.front)} on the Pareto front"
    return f"{said}, {refused} refused" if refused else said


def _table(look: Look, sweep: Sweep, rows: Sequence[Row]) -> Table:
    shown = _shown_columns(sweep)
    table = Table.grid(padding=(0, 2))
    for name in shown:
        table.add_column(justify="left" if name in ("", "rounding", "fit") else "right")
    table.add_row(*(Text.assemble((_TITLES[name], "bold")) for name in shown))
    marks = set(sweep.front)
    for row in rows:
        assert row.cost is not None
        on_front = row.index in marks
        cells = {**_cells(row, row.cost), "": look.sign("note") if on_front else ""}
        style = STYLES["note"] if on_front else ""
        table.add_row(*(Text.assemble((cells[name], style)) for name in shown))
    return table


_TITLES = {
    "": "  ",
    "bits": "bits",
    "error": "error, LSB",
    "coefficient_bits": "coefficient",
    "coefficient_frac": "frac",
    "intermediate_bits": "intermediate",
    "intermediate_frac": "frac",
    "accumulators": "accumulator",
    "response": "response",
    "rounding": "rounding",
    "fit": "fit",
}


def _shown_columns(sweep: Sweep) -> list[str]:
    """Return the columns that say something: an axis of one value does not."""
    two_passes = any(row.cost is not None and row.cost.intermediate_bits for row in sweep.rows)
    idle = {
        "intermediate_bits": not two_passes,
        "intermediate_frac": not two_passes,
        "response": not sweep.grid.response,
        "rounding": len(sweep.grid.rounding) < 2,
        "fit": len(sweep.grid.fit) < 2,
    }
    return [name for name in _TITLES if not idle.get(name)]


def _cells(row: Row, cost: Cost) -> dict[str, str]:
    frac = cost.intermediate_frac
    return {
        "bits": str(cost.bits),
        "error": upper(cost.error),
        "coefficient_bits": str(cost.coefficient_bits),
        "coefficient_frac": _joined(cost.coefficient_frac),
        "intermediate_bits": str(cost.intermediate_bits),
        "intermediate_frac": "" if frac is None else str(frac),
        "accumulators": _joined(cost.accumulators),
        "response": "" if cost.response is None else upper(cost.response),
        "rounding": row.point.rounding.value if row.point.rounding else "",
        "fit": row.point.fit.value if row.point.fit else "",
    }


def _joined(numbers: Sequence[int]) -> str:
    return " ".join(map(str, numbers))


def _notes(sweep: Sweep, left_out: int) -> list[str]:
    """Return what the table means, what it leaves out, and why points were refused."""
    notes = [
        "bits: a coefficient and an accumulator for each pass, and the intermediate, added up.",
        "error: no legal input errs by more. Marked: no other point has less of both.",
    ]
    if left_out:
        notes.append(f"{plural(left_out, 'point')} off the front left out; --all lists every one.")
    return [*notes, *_reasons(sweep)]


def _reasons(sweep: Sweep) -> list[str]:
    """Return for each kind of refusal how many points it is, and what the first one said."""
    refused = [row.refused for row in sweep.rows if row.refused is not None]
    counts = Counter(found.kind for found in refused)
    notes = []
    for kind, count in sorted(counts.items(), key=lambda each: (-each[1], each[0])):
        first = sentence(next(found for found in refused if found.kind == kind))
        notes.append(f"refused, {plural(count, 'point')}: {first.split('. ')[0]}.")
    return notes


def sweep_csv(sweep: Sweep) -> str:
    """Return the rows in the grid's order as CSV (RFC 4180, lines end in a line feed)."""
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(COLUMNS)
    marks = set(sweep.front)
    for row in sweep.rows:
        writer.writerow(_record(row, row.index in marks))
    return stream.getvalue()


def _record(row: Row, on_front: bool) -> list[str]:
    if row.cost is None:
        return _refused_record(row)
    cost, cells = row.cost, _cells(row, row.cost)
    return [
        cells["coefficient_bits"],
        cells["coefficient_frac"],
        cells["intermediate_bits"] if cost.intermediate_bits else "",
        cells["intermediate_frac"],
        cells["rounding"],
        cells["fit"],
        cells["accumulators"],
        cells["bits"],
        upper(cost.error, ERROR_PLACES),
        lower(cost.low, ERROR_PLACES),
        upper(cost.high, ERROR_PLACES),
        "" if cost.response is None else upper(cost.response, ERROR_PLACES),
        "yes" if on_front else "no",
        "",
    ]


def _refused_record(row: Row) -> list[str]:
    """Return what was asked for, and why there is nothing else to say."""
    assert row.refused is not None
    point = row.point
    asked = (point.coefficient_bits, point.coefficient_frac, point.intermediate_bits)
    words = (*asked, point.intermediate_frac, point.rounding, point.fit)
    cells = ["" if each is None else str(each) for each in words]
    return [*cells, *[""] * 6, "no", sentence(row.refused)]
