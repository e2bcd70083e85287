"""The table of filters, written once for all tests, and the calls that are made on them."""

from dataclasses import dataclass
from pathlib import Path

import pytest

from . import bench


@dataclass(frozen=True)
class Bench:
    """A folder with every filter of the table, and a job: all calls as bytes."""

    folder: Path
    made: tuple[bench.Emitted, ...]
    questions: tuple[bench.Question, ...]

    def job(self, most_elements: int | None = None) -> bytes:
        """All calls, or those on frames and outputs of no more elements than that."""
        return b"".join(
            bench.record(question, number)
            for number, question in enumerate(self.questions)
            if most_elements is None or question.elements <= most_elements
        )


@pytest.fixture(scope="session")
def table(tmp_path_factory: pytest.TempPathFactory) -> Bench:
    folder = tmp_path_factory.mktemp("emitted")
    made = bench.emitted()
    bench.write(folder, made)
    return Bench(folder, made, tuple(bench.questions(made)))
