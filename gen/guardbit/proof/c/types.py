"""C's types, as far as filters need them, under a data model."""

from dataclasses import dataclass
from typing import TypeAlias

from guardbit.model.proof import DataModel


@dataclass(frozen=True, slots=True)
class Integer:
    """An integer type. `rank` orders types of equal width; `boolean` marks _Bool."""

    name: str
    bits: int
    signed: bool
    rank: int
    boolean: bool = False

    @property
    def low(self) -> int:
        """Return the least value."""
        return -(1 << self.bits - 1) if self.signed else 0

    @property
    def high(self) -> int:
        """Return the greatest value."""
        if self.boolean:
            return 1
        return (1 << self.bits - self.signed) - 1

    @property
    def cells(self) -> int:
        """Return how many cells of memory it takes."""
        return 1


@dataclass(frozen=True, slots=True)
class Void:
    cells: int = 1


@dataclass(frozen=True, slots=True)
class Pointing:
    """A pointer type; `constant`: to what may not be written through it."""

    to: "Type"
    constant: bool = False
    restrict: bool = False

    @property
    def cells(self) -> int:
        """Return how many cells of memory it takes."""
        return 1


@dataclass(frozen=True, slots=True)
class Array:
    of: "Type"
    count: int
    constant: bool = False

    @property
    def cells(self) -> int:
        """Return how many cells of memory it takes."""
        return self.count * self.of.cells


@dataclass(frozen=True, slots=True)
class Struct:
    """Fields by name, in order, each beginning some cells after the struct does."""

    tag: str
    fields: tuple[tuple[str, "Type"], ...]

    @property
    def cells(self) -> int:
        """Return how many cells of memory it takes."""
        return sum(kind.cells for _, kind in self.fields)

    def field(self, name: str) -> "tuple[Type, int] | None":
        """Return the type of a field and after how many cells it begins."""
        before = 0
        for each, kind in self.fields:
            if each == name:
                return kind, before
            before += kind.cells
        return None


@dataclass(frozen=True, slots=True)
class Function:
    returns: "Type"
    parameters: tuple["Type", ...]

    @property
    def cells(self) -> int:
        """Return how many cells of memory it takes."""
        return 1


Type: TypeAlias = Integer | Void | Pointing | Array | Struct | Function

CHAR_BITS = 8
_RANKS = ("_Bool", "char", "short", "int", "long", "long long")


class Types:
    """The integer types of a data model."""

    def __init__(self, model: DataModel) -> None:
        self.model = model
        widths = {
            "char": CHAR_BITS,
            "short": 16,
            "int": model.int_bits,
            "long": model.long_bits,
            "long long": 64,
        }
        self.by_name: dict[str, Integer] = {"_Bool": Integer("_Bool", 1, False, 0, boolean=True)}
        for name, bits in widths.items():
            rank = _RANKS.index(name)
            signed = name != "char" or model.char_signed
            self.by_name[name] = Integer(name, bits, signed, rank)
            self.by_name[f"signed {name}"] = Integer(name, bits, True, rank)
            self.by_name[f"unsigned {name}"] = Integer(f"unsigned {name}", bits, False, rank)
        self.int = self.by_name["int"]
        self.unsigned = self.by_name["unsigned int"]
        self.size = next(
            self.by_name[f"unsigned {name}"]
            for name in ("int", "long", "long long")
            if widths[name] == model.pointer
        )
        self.difference = self.signed_of(self.size)

    def signed_of(self, kind: Integer) -> Integer:
        """Return the signed type of the same rank."""
        return self.by_name[f"signed {kind.name.removeprefix('unsigned ').removeprefix('signed ')}"]

    def named(self, words: list[str]) -> Integer | None:
        """Return the type of specifiers such as unsigned, long, int; None if there is none."""
        left = [w for w in words if w not in ("signed", "unsigned")]
        sign = "unsigned " if "unsigned" in words else "signed " if "signed" in words else ""
        if left.count("long") == 2:
            core = "long long"
        elif "long" in left:
            core = "long"
        elif "short" in left:
            core = "short"
        else:
            core = left[0] if left else "int"
        if core == "_Bool":
            return self.by_name["_Bool"]
        found = self.by_name.get(sign + core)
        # plain short, int and long are signed
        return found if sign or core == "char" else self.by_name.get(f"signed {core}")

    def promoted(self, kind: Integer) -> Integer:
        """Return the type after the integer promotions (C99 6.3.1.1)."""
        if kind.rank >= self.int.rank:
            return kind
        fits = kind.low >= self.int.low and kind.high <= self.int.high
        return self.by_name["signed int"] if fits else self.unsigned

    def common(self, a: Integer, b: Integer) -> Integer:
        """Return the common type of the usual arithmetic conversions (C99 6.3.1.8)."""
        a, b = self.promoted(a), self.promoted(b)
        if a.signed == b.signed:
            return a if a.rank >= b.rank else b
        plain, unsigned = (a, b) if a.signed else (b, a)
        if unsigned.rank >= plain.rank:
            return unsigned
        if plain.high >= unsigned.high:
            return plain
        return self.by_name[f"unsigned {plain.name.removeprefix('signed ')}"]

    def of_constant(self, value: int, suffix: str, decimal: bool) -> Integer | None:
        """Return the type of an integer constant (C99 6.4.4.1)."""
        unsigned = "u" in suffix
        longs = suffix.count("l")
        names = ("int", "long", "long long")[min(longs, 2) :]
        for name in names:
            signed = self.by_name[f"signed {name}"]
            if not unsigned and value <= signed.high:
                return signed
            other = self.by_name[f"unsigned {name}"]
            if (unsigned or not decimal) and value <= other.high:
                return other
        return None
