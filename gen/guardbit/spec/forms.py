"""The forms that a key's value can take, and how each is described to a person."""

from dataclasses import dataclass
from enum import StrEnum
from typing import TypeAlias

BOX_LIMIT = 255
TAP_LIMIT = 4096
# no sum of as many taps of 32 bits is beyond
SUM_LIMIT = TAP_LIMIT << 32
SUMMARY_LIMIT = 200


def listed(words: tuple[str, ...], last: str = "or") -> str:
    """Return words as a phrase: "a", "a or b", "a, b or c"."""
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} {last} {words[-1]}"


@dataclass(frozen=True)
class Whole:
    """A whole number, or the word "auto" where that is allowed."""

    low: int
    high: int
    auto: bool = False

    @property
    def wanted(self) -> str:
        """What would be right."""
        word = ' or "auto"' if self.auto else ""
        return f"a whole number from {self.low} to {self.high}{word}"


@dataclass(frozen=True)
class Flag:
    """true or false."""

    wanted: str = "true or false"


@dataclass(frozen=True)
class Choice:
    """One word of a closed list."""

    words: type[StrEnum]

    @property
    def wanted(self) -> str:
        """What would be right."""
        return listed(tuple(f'"{word.value}"' for word in self.words))


@dataclass(frozen=True)
class Among:
    """One of a few whole numbers."""

    numbers: tuple[int, ...]

    @property
    def wanted(self) -> str:
        """What would be right."""
        return listed(tuple(str(number) for number in self.numbers))


@dataclass(frozen=True)
class Identifier:
    """The name that prefixes every C symbol."""

    wanted: str = "a letter, then up to 23 letters, digits or single underscores"


@dataclass(frozen=True)
class Line:
    """One line of printable text that cannot disturb a C comment."""

    wanted: str = f"one line of text, at most {SUMMARY_LIMIT} characters"


@dataclass(frozen=True)
class RelativePath:
    """A file beside the spec or below its folder."""

    wanted: str = "a path relative to the spec's folder, ending in .npy, .csv, .pgm or .png"


@dataclass(frozen=True)
class Span:
    """[least, greatest], both whole numbers."""

    low: int
    high: int

    @property
    def wanted(self) -> str:
        """What would be right."""
        return f"[least, greatest], two whole numbers from {self.low} to {self.high}"


@dataclass(frozen=True)
class Two:
    """[vertical, horizontal], both whole numbers."""

    low: int
    high: int

    @property
    def wanted(self) -> str:
        """What would be right."""
        return f"[vertical, horizontal], two whole numbers from {self.low} to {self.high}"


@dataclass(frozen=True)
class WholeOrTwo:
    """A whole number or "auto"; or [column's, row's] of these. Read as a tuple of 1 or 2."""

    low: int
    high: int

    @property
    def wanted(self) -> str:
        """What would be right."""
        return f"a whole number from {self.low} to {self.high}, \"auto\", or [column's, row's]"


@dataclass(frozen=True)
class Size:
    """A whole number, or [rows, columns]. Read as a pair."""

    low: int
    high: int

    @property
    def wanted(self) -> str:
        """What would be right."""
        return f"a whole number from {self.low} to {self.high}, or [rows, columns] of these"


@dataclass(frozen=True)
class Positive:
    """A number above zero, or [vertical, horizontal]. Read as a pair of rationals."""

    wanted: str = 'a number above zero (1.5 or "3/2"), or [vertical, horizontal] of these'


@dataclass(frozen=True)
class Rational:
    """One exact number, above zero if it is to be `positive`."""

    positive: bool

    @property
    def wanted(self) -> str:
        """What would be right."""
        return f'a number{" above zero" if self.positive else ""} (1.5 or "3/2")'


@dataclass(frozen=True)
class Paths:
    """Files beside the spec or below its folder, by name."""

    wanted: str = 'a list of image files, each a path such as "shots/line3.pgm"'


@dataclass(frozen=True)
class Order:
    """Words of a closed list, each at most once; those left out follow. Read as all of them."""

    words: type[StrEnum]

    @property
    def wanted(self) -> str:
        """What would be right."""
        words = tuple(f'"{word.value}"' for word in self.words)
        return f"a list of {listed(words, 'and')}"


@dataclass(frozen=True)
class DivisorForm:
    """A positive number or "sum", or [column's, row's]. Read as a tuple of 1 or 2."""

    wanted: str = 'a number above zero (16 or "49/2"), "sum", or [column\'s, row\'s] of these'


@dataclass(frozen=True)
class Rows:
    """A matrix of exact numbers."""

    wanted: str = 'rows of numbers, all of one length: whole, decimal, or ratios such as "1/16"'


@dataclass(frozen=True)
class Numbers:
    """A vector of exact numbers."""

    wanted: str = 'a list of numbers: whole, decimal, or ratios such as "1/16"'


@dataclass(frozen=True)
class PinnedForm:
    """A matrix of whole numbers, or a table of column and row."""

    wanted: str = "rows of whole numbers, or { column = [...], row = [...] }"


@dataclass(frozen=True)
class RegistersForm:
    """A table of limits of taps and their sums, or of a list of kernels."""

    wanted: str = (
        "{ least = ..., greatest = ..., sum = ..., magnitudes = ... } with any of these, or "
        "{ kernels = [...] }, all of whole numbers"
    )


@dataclass(frozen=True)
class Reserved:
    """A place kept for a later version."""

    wanted: str = "nothing yet: a later version reads it"


Form: TypeAlias = (
    Whole
    | Flag
    | Choice
    | Among
    | Identifier
    | Line
    | RelativePath
    | Span
    | Two
    | WholeOrTwo
    | Size
    | Positive
    | Rational
    | Paths
    | Order
    | DivisorForm
    | Rows
    | Numbers
    | PinnedForm
    | RegistersForm
    | Reserved
)
