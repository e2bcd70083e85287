"""What `size` does with one spec: the sizing, and whatever else it was asked for."""

from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from guardbit.cli import api
from guardbit.cli.answer import WRONG, Answer
from guardbit.model.enums import FitRule, Scale
from guardbit.model.finding import Place, SpecError, finding
from guardbit.model.spec import Spec

if TYPE_CHECKING:
    from guardbit.model.frequency import ResponseFit
    from guardbit.model.goal import GoalSearch


@dataclass(frozen=True)
class Size:
    """The sizing of a spec.

    `sheet`: all that goes on a sizing sheet. `photographs`: image files that are filtered for
    it. `files`: the sheet and the witnesses as files. `pin`: write what was searched into the
    spec.
    """

    sheet: bool = False
    photographs: tuple[str, ...] = ()
    files: bool = False
    pin: bool = False

    def __call__(self, spec: str) -> Answer:
        """Return the answer. Status 2 if a `forbid` or a goal is not met."""
        found = _Settled.of(api.read(spec), self.pin)
        sizing = api.size(found.spec)
        findings = (*api.unmet(sizing, found.spec), *api.unmet_goals(sizing, found.spec))
        answer = Answer(
            spec,
            WRONG if findings else 0,
            findings,
            sizing,
            search=found.search,
            fit=found.fit,
            orders=api.orders(sizing),
        )
        if self.sheet or self.photographs or self.files:
            sheet = api.sheet(sizing, self.photographs)
            files = api.sheet_files(sheet) if self.files else {}
            answer = replace(answer, sheet=sheet, files=files)
        if self.pin and not findings:
            answer = replace(answer, pinned=found.write())
        return answer


@dataclass(frozen=True)
class _Settled:
    """A spec with nothing left to search, and the text that says so."""

    spec: Spec
    before: bytes
    text: str
    search: "GoalSearch | None"
    fit: "ResponseFit | None"

    @classmethod
    def of(cls, spec: Spec, pin: bool) -> "_Settled":
        """Return the spec after what it leaves open was searched.

        A goal is searched for in any case; a `response` fit only to be pinned. Raises SpecError.
        """
        before = Path(spec.path).read_bytes()
        text = before.decode("utf-8")
        search, fit = None, None
        if spec.goal is not None:
            search = api.search(spec)
        if search is not None:
            from guardbit.study.goals.pins import pin_goal

            text = pin_goal(spec, text, search)
        elif pin and _is_response_open(spec):
            from guardbit.study.response.fit import fit_response
            from guardbit.study.response.pins import pin_fit

            fit = fit_response(spec)
            text = pin_fit(spec, text, fit)
        settled = spec if text.encode("utf-8") == before else _parsed(spec, text)
        return cls(settled, before, text, search, fit)

    def write(self) -> bool:
        """Write the text over the spec, and return whether there was anything to write."""
        from guardbit.files.writing import write_atomic

        data, path = self.text.encode("utf-8"), Path(self.spec.path)
        if data == self.before:
            return False
        if path.read_bytes() != self.before:
            raise SpecError(finding("spec-changed", Place(self.spec.path)))
        write_atomic(path.parent, {path.name: data})
        return True


def _is_response_open(spec: Spec) -> bool:
    table = spec.coefficient
    asked = table.fit is FitRule.RESPONSE and table.scale is Scale.BINARY
    return asked and table.pinned is None


def _parsed(spec: Spec, text: str) -> Spec:
    from guardbit.spec.reader import parse_spec

    return parse_spec(text, spec.path, Path(spec.path).parent)
