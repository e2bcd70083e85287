"""The table of goals: what it holds, and what contradicts it."""

from dataclasses import replace
from fractions import Fraction
from pathlib import Path

from guardbit.files.paths import safe_path
from guardbit.model.enums import WordLength
from guardbit.model.finding import SpecError
from guardbit.model.spec import Auto, GoalTable
from guardbit.spec.names import line_faults
from guardbit.spec.sheet import Sheet
from guardbit.spec.values import shown

_SOUGHT = ("goal.error", "goal.snr", "goal.response")
_BETWEEN = ("intermediate.bits", "intermediate.frac")


def read_goal(sheet: Sheet) -> GoalTable:
    """Return the goal of a sheet that has one, free of findings."""
    error, snr, response = (sheet.maybe(key, Fraction) for key in _SOUGHT)
    return GoalTable(
        error=error,
        snr=snr,
        response=response,
        frames=sheet.maybe("goal.frames", tuple) or (),
        minimise=sheet.maybe("goal.minimise", tuple) or tuple(WordLength),
    )


def check_goal(sheet: Sheet, folder: Path) -> None:
    """Report words left to a search without a goal, and goals that say too little."""
    if "goal" not in sheet.given:
        for key in _BETWEEN:
            if sheet.values[key] is Auto.AUTO:
                sheet.report("auto-without-goal", key, got=key)
        return
    if not any(key in sheet.given for key in _SOUGHT):
        sheet.report("goal-empty", "goal")
    elif _between_is_open(sheet) and not {"goal.error", "goal.snr"} & sheet.given:
        sheet.report("goal-without-error", "goal")
    if ("goal.snr" in sheet.given) is not ("goal.frames" in sheet.given):
        given, missing = ("snr", "frames") if "goal.snr" in sheet.given else ("frames", "snr")
        sheet.report("goal-half", f"goal.{given}", got=given, missing=missing)
    if "goal.frames" in sheet.given and sheet.usable("goal.frames"):
        for at, path in enumerate(sheet.get("goal.frames", tuple)):
            _check_path(sheet, folder, path, at)


def _between_is_open(sheet: Sheet) -> bool:
    """Return whether a search chooses what is rounded away between the passes.

    The frequency response does not see that: any intermediate would reach a goal for it.
    """
    open_keys = (sheet.values[key] in (None, Auto.AUTO) for key in _BETWEEN)
    return "intermediate" in sheet.given and sheet.usable(*_BETWEEN) and any(open_keys)


def _check_path(sheet: Sheet, folder: Path, path: str, at: int) -> None:
    """Report a path that leads out of the folder; the file is read by the search alone."""
    place = sheet.place("goal.frames", at)
    if line_faults(path):
        sheet.report_at("path-characters", place, got=shown(path))
        return
    try:
        safe_path(folder, path)
    except SpecError as error:
        sheet.findings.extend(replace(each, place=place) for each in error.findings)
