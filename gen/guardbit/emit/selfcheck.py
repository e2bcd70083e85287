"""The vectors that the self-check program carries."""

from collections.abc import Sequence
from dataclasses import dataclass

from guardbit.model.vectors import Vector


@dataclass(frozen=True)
class VectorText:
    """One frame and its response, as flat lists of codes; sizes are in pixels."""

    name: str
    purpose: str
    width: int
    height: int
    out_width: int
    out_height: int
    source: tuple[int, ...]
    output: tuple[int, ...]


@dataclass(frozen=True)
class SelfcheckText:
    """All vectors, and the sizes of the buffers that do for each of them."""

    vectors: tuple[VectorText, ...]
    largest_output: int
    largest_width: int


def selfcheck_text(vectors: Sequence[Vector]) -> SelfcheckText:
    """Return the text of the self-check program."""
    texts = tuple(_vector(vector) for vector in vectors)
    return SelfcheckText(
        vectors=texts,
        largest_output=max([1, *(len(text.output) for text in texts)]),
        largest_width=max([1, *(text.width for text in texts)]),
    )


def _vector(vector: Vector) -> VectorText:
    frame, output = vector.frame, vector.response.output
    return VectorText(
        name=vector.name,
        purpose=vector.purpose.value,
        width=frame.shape[1],
        height=frame.shape[0],
        out_width=output.shape[1],
        out_height=output.shape[0],
        source=tuple(int(code) for code in frame.ravel()),
        output=tuple(int(code) for code in output.ravel()),
    )
