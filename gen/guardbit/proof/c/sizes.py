"""Sizes of types in bytes, where no padding can make them differ between compilers."""

from guardbit.proof.c.types import CHAR_BITS, Array, Integer, Pointing, Struct, Type, Types


def size_of(types: Types, kind: Type) -> int | None:
    """Return the size in bytes; None for a struct that may hold padding, and other types."""
    match kind:
        case Integer():
            return max(kind.bits // CHAR_BITS, 1)
        case Pointing():
            return types.model.pointer // CHAR_BITS
        case Array():
            each = size_of(types, kind.of)
            return None if each is None else kind.count * each
        case Struct():
            sizes = {size_of(types, field) for _, field in kind.fields}
            if len(sizes) != 1 or None in sizes:
                return None
            (each,) = sizes
            assert each is not None
            return each * len(kind.fields)
        case _:
            return None
