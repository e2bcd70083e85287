"""The plot of a sweep: error against bits, with the Pareto front. Needs the extra `report`."""

from __future__ import annotations

import io
from importlib import import_module
from typing import TYPE_CHECKING, Any

from guardbit.model.finding import MachineError, SpecError, finding

if TYPE_CHECKING:
    from collections.abc import Sequence

    from guardbit.model.sweep import Row, Sweep

# Told apart by shape and by lightness, so that print in grey and any eye can read them.
_POINT = {"marker": "o", "s": 16, "color": "#9a9a9a", "linewidths": 0}
_FRONT = {"marker": "D", "s": 36, "color": "#005a8c", "linewidths": 0}
FORMATS = (".png", ".svg")


def check_plot(name: str) -> None:
    """Raise what `sweep_plot` would raise whatever the sweep: before hours of work, not after."""
    if not name.lower().endswith(FORMATS):
        raise SpecError(finding("plot-format", path=name, expected=" or ".join(FORMATS)))
    _matplotlib("figure")


def _matplotlib(module: str) -> Any:  # noqa: ANN401 - a library without types
    try:
        return import_module(f"matplotlib.{module}" if module else "matplotlib")
    except ImportError:
        raise MachineError(finding("needs-matplotlib")) from None


def sweep_plot(sweep: Sweep, name: str) -> bytes:
    """Return the plot as the suffix of `name` says, PNG or SVG; same sweep, same bytes.

    Raises SpecError for another suffix, MachineError without Matplotlib.
    """
    check_plot(name)
    # what a user's own settings change would change the bytes
    with _matplotlib("").rc_context({**_matplotlib("").rcParamsDefault, **_SETTINGS}):
        figure = _matplotlib("figure").Figure(figsize=(7, 4.5), layout="constrained")
        _draw(figure.add_subplot(), sweep)
        stream = io.BytesIO()
        kind = name.lower().rpartition(".")[2]
        metadata = {"Date": None} if kind == "svg" else {"Software": None}
        figure.savefig(stream, format=kind, dpi=150, metadata=metadata)
    return stream.getvalue()


# A hash in place of random names; text stays text that can be searched.
_SETTINGS = {"svg.hashsalt": "guardbit", "svg.fonttype": "none", "backend": "agg"}


def _draw(axes: Any, sweep: Sweep) -> None:  # noqa: ANN401
    marks = set(sweep.front)
    held = [row for row in sweep.rows if row.cost is not None]
    axes.set_title(sweep.name)
    axes.set_xlabel("bits of all words of all passes")
    axes.set_ylabel("bound of |error|, LSB")
    _scatter(axes, [row for row in held if row.index not in marks], _POINT, "point")
    front = sorted((row for row in held if row.index in marks), key=_place)
    _scatter(axes, front, _FRONT, "Pareto front")
    axes.plot(*_steps(front), color="#005a8c", linewidth=1, drawstyle="steps-post")
    if any(row.cost is not None and row.cost.error > 0 for row in held):
        axes.set_yscale("symlog", linthresh=0.5)
        axes.set_ylim(bottom=0)
    axes.grid(True, color="#e4e4e4", linewidth=0.6)
    axes.set_axisbelow(True)
    if held:
        axes.legend(frameon=False)


def _place(row: Row) -> tuple[int, float]:
    assert row.cost is not None
    return row.cost.bits, float(row.cost.error)


def _steps(rows: Sequence[Row]) -> tuple[list[float], list[float]]:
    places = [_place(row) for row in rows]
    return [float(bits) for bits, _ in places], [error for _, error in places]


def _scatter(axes: Any, rows: Sequence[Row], style: dict[str, Any], label: str) -> None:  # noqa: ANN401
    if rows:
        axes.scatter(*_steps(rows), label=label, **style)
