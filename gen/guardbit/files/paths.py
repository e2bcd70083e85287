"""Paths that a file names: they stay inside the folder of that file."""

from pathlib import Path, PurePosixPath, PureWindowsPath

from guardbit.files.reading import refusal


def safe_path(folder: Path, relative: str) -> Path:
    """Return where `relative` leads from `folder`, every link followed.

    The path need not exist. Raises SpecError for a path that is empty or absolute (on any
    system), holds a backslash or a NUL, climbs out of the folder, or leaves it by a link.
    """
    _refuse_text(relative)
    _refuse_climbing(relative)
    try:
        home = folder.resolve()
        target = (home / relative).resolve()
    except (OSError, RuntimeError):
        raise refusal("path-loops", relative) from None
    if not target.is_relative_to(home):
        raise refusal("path-link-out", relative)
    return target


def _refuse_text(relative: str) -> None:
    if not relative:
        raise refusal("path-empty", relative)
    if "\0" in relative or not _encodable(relative):
        raise refusal("path-nul", relative)
    # A drive letter is absolute on one system and a file name on another.
    windows = PureWindowsPath(relative)
    if PurePosixPath(relative).is_absolute() or windows.drive or windows.root:
        raise refusal("path-absolute", relative)
    if "\\" in relative:
        raise refusal("path-backslash", relative)


def _encodable(text: str) -> bool:
    return not any("\ud800" <= character <= "\udfff" for character in text)


def _refuse_climbing(relative: str) -> None:
    depth = 0
    for part in PurePosixPath(relative).parts:
        depth += -1 if part == ".." else 1
        if depth < 0:
            raise refusal("path-climbs-out", relative)
