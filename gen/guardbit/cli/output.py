"""Writing what a spec gives into a folder, over nothing that a person has edited."""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path

from guardbit.cli.answer import WRONG, Answer
from guardbit.model.certificate import Digest
from guardbit.model.finding import Finding, Place, SpecError, finding
from guardbit.report.certificate import emitted_digests, load_certificate

CERTIFICATE_SUFFIX = ".cert.json"
SHEET_SUFFIX = ".sheet.json"


def write_files(folder: Path, data: Mapping[str, bytes], force: bool = False) -> tuple[Digest, ...]:
    """Write files (bytes by name, a sealed record among them) and return their digests.

    The record, a certificate or a sizing sheet, holds the digests of the others. All of them
    are written or none. Raises SpecError if one that is there was edited since guardbit wrote
    it, or was not written by guardbit, unless `force`; MachineError if the folder cannot be
    written.
    """
    from guardbit.files.writing import digest, write_atomic

    if not force and (findings := _edited(folder, data)):
        raise SpecError(*findings)
    # The record vouches for the others, so it takes its place last.
    order = sorted(data, key=_is_record)
    write_atomic(folder, {name: data[name] for name in order})
    return tuple(Digest(name, digest(data[name])) for name in order)


def _is_record(name: str) -> bool:
    return name.endswith((CERTIFICATE_SUFFIX, SHEET_SUFFIX))


def _edited(folder: Path, data: Mapping[str, bytes]) -> list[Finding]:
    from guardbit.files.writing import digest, edited

    recorded = _recorded(folder, data)
    changed = edited(folder, {name: recorded.get(name, "") for name in data})
    # What is there already, byte for byte, is not lost by writing it again.
    changed = edited(folder, {name: digest(data[name]) for name in changed})
    kind = "output-edited" if recorded else "output-unknown"
    paths = [str(folder / name) for name in changed]
    return [finding(kind, Place(path), path=path) for path in paths]


def _recorded(folder: Path, data: Mapping[str, bytes]) -> dict[str, str]:
    """Return the digests that a sound record in the folder holds, its own included."""
    from guardbit.files.writing import digest

    name = next(each for each in data if _is_record(each))
    try:
        there = (folder / name).read_bytes()
        document = load_certificate(there.decode("ascii"))
    except (OSError, UnicodeDecodeError, SpecError):
        return {}
    return {**emitted_digests(document), name: digest(there)}


def without_namesakes(answers: Sequence[Answer]) -> list[Answer]:
    """Return the answers, with a finding instead of files where two would write the same."""
    users: dict[str, list[str]] = {}
    for answer in answers:
        for name in answer.files:
            users.setdefault(name.casefold(), []).append(answer.spec)
    return [_refused(answer, users) for answer in answers]


def _refused(answer: Answer, users: Mapping[str, Sequence[str]]) -> Answer:
    sharing = [users[name.casefold()] for name in answer.files]
    if all(len(specs) == 1 for specs in sharing) or answer.sizing is None:
        return answer
    others = [spec for spec in sharing[0] if spec != answer.spec] or [answer.spec]
    place = Place(answer.spec, key="filter.name")
    found = finding("same-name", place, name=answer.sizing.filter.name, other=", ".join(others))
    return replace(answer, status=WRONG, findings=(found,), files={}, certificate=None)
