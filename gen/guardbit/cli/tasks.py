"""One spec's work for each command, as functions that worker processes can be given.

They return an Answer whatever happens; only Ctrl-C and the end of the process pass through.
"""

import traceback
from collections.abc import Callable
from dataclasses import dataclass, replace

from guardbit.cli import api
from guardbit.cli.answer import FAULT, MISSING, Answer, rung_status
from guardbit.model.finding import Finding, GuardbitError, Place, finding


@dataclass(frozen=True)
class Task:
    """`work` done on a spec, with anything that goes wrong turned into findings."""

    work: Callable[[str], Answer]

    def __call__(self, spec: str) -> Answer:
        """Return the answer for a spec. Raises nothing but what ends the process."""
        try:
            return self.work(spec)
        except GuardbitError as error:
            return Answer(spec, error.status, tuple(_placed(f, spec) for f in error.findings))
        except MemoryError:
            return Answer(spec, MISSING, (finding("no-memory", Place(spec)),))
        except OSError as error:
            reason = error.strerror or type(error).__name__
            return Answer(spec, MISSING, (finding("machine-refused", Place(spec), reason=reason),))
        except Exception as error:
            return fault(spec, error)


def _placed(found: Finding, spec: str) -> Finding:
    """Return the finding with the spec's name, if it is about a key of an unnamed file."""
    place = found.place
    if place.file is not None or place.key is None:
        return found
    return replace(found, place=replace(place, file=spec))


def fault(spec: str, error: Exception) -> Answer:
    """Return the answer that says that guardbit itself is wrong."""
    what = f"{type(error).__name__}: {error}".removesuffix(": ")
    found = finding("fault", Place(spec or None), what=what)
    return Answer(spec, FAULT, (found,), fault=traceback.format_exc())


def lost(spec: str, status: int) -> Answer:
    """Return the answer for a spec whose worker process died."""
    cause = f"signal {-status}" if status < 0 else f"exit status {status}"
    return Answer(spec, MISSING, (finding("worker-lost", Place(spec), cause=cause),))


def emit(spec: str) -> Answer:
    """Return the files that a spec gives, not yet written."""
    return _made(spec, api.emit(spec))


@dataclass(frozen=True)
class Verify:
    """The ladder for a spec. `compiler` is a command, `photograph` an image file's name.

    `defects` is how many faults are seeded in the C; None: that is left out. `against` is the
    user's own C: a file, a function in it and what its arguments are.
    """

    compiler: str | None = None
    photograph: str | None = None
    keep: str | None = None
    defects: int | None = None
    against: tuple[str, str, tuple[str, ...]] | None = None

    def __call__(self, spec: str) -> Answer:
        """Return the answer that holds every rung's result."""
        more = api.Checks(self.defects, self.against)
        product = api.verify(spec, self.compiler, self.photograph, self.keep, more)
        rungs = product.certificate.rungs
        findings = tuple(f for rung in rungs for f in rung.findings)
        return replace(_made(spec, product), status=rung_status(rungs), findings=findings)


def _made(spec: str, product: api.Product) -> Answer:
    certificate = product.certificate
    return Answer(spec, sizing=certificate.sizing, certificate=certificate, files=product.data)
