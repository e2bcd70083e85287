"""The standard headers that sources may include, written for a data model."""

from guardbit.model.proof import DataModel

_WIDTHS = (8, 16, 32, 64)


def headers(model: DataModel) -> dict[str, str]:
    """Return the text of each header by its name."""
    return {
        "stdint.h": _stdint(model),
        "stddef.h": _stddef(model),
        "limits.h": _limits(model),
        "stdbool.h": "#define bool _Bool\n#define true 1\n#define false 0\n",
        "string.h": _stddef(model) + _STRING,
        "assert.h": "#define assert(holds) ((void)(holds))\n",
    }


_STRING = """void *memcpy(void *to, const void *from, size_t count);
void *memmove(void *to, const void *from, size_t count);
void *memset(void *to, int value, size_t count);
"""


def _word(model: DataModel, bits: int) -> str:
    """Return the name of the type that intN_t is."""
    if bits == 8:
        return "signed char"
    names = {16: "short", model.long_bits: "long", model.int_bits: "int"}
    return names.get(bits, "long long")


def _suffix(model: DataModel, bits: int) -> str:
    if bits <= model.int_bits:
        return ""
    return "L" if bits <= model.long_bits else "LL"


def _unsigned(name: str) -> str:
    return "unsigned char" if name == "signed char" else f"unsigned {name}"


def _stdint(model: DataModel) -> str:
    lines = ["#ifndef STDINT_SEEN", "#define STDINT_SEEN"]
    for bits in _WIDTHS:
        name, suffix = _word(model, bits), _suffix(model, bits)
        for prefix in ("", "_least", "_fast"):
            lines.append(f"typedef {name} int{prefix}{bits}_t;")
            lines.append(f"typedef {_unsigned(name)} uint{prefix}{bits}_t;")
        most = (1 << bits - 1) - 1
        unsigned = f"{(1 << bits) - 1}{'' if bits < model.int_bits else 'U'}{suffix}"
        for prefix in ("", "_LEAST", "_FAST"):
            lines.append(f"#define INT{prefix}{bits}_MAX {most}{suffix}")
            lines.append(f"#define INT{prefix}{bits}_MIN (-{most}{suffix} - 1)")
            lines.append(f"#define UINT{prefix}{bits}_MAX {unsigned}")
        unsigned_suffix = f"{'U' if bits >= model.int_bits else ''}{suffix}"
        lines.append(f"#define INT{bits}_C(c) c{' ## ' + suffix if suffix else ''}")
        joined = f" ## {unsigned_suffix}" if unsigned_suffix else ""
        lines.append(f"#define UINT{bits}_C(c) c{joined}")
    pointer = _word(model, model.pointer)
    lines += [
        f"typedef {pointer} intptr_t;",
        f"typedef {_unsigned(pointer)} uintptr_t;",
        "typedef int64_t intmax_t;",
        "typedef uint64_t uintmax_t;",
        f"#define SIZE_MAX {(1 << model.pointer) - 1}U{_suffix(model, model.pointer)}",
        "#endif",
    ]
    return "\n".join(lines) + "\n"


def _stddef(model: DataModel) -> str:
    pointer = _word(model, model.pointer)
    return (
        "#ifndef STDDEF_SEEN\n#define STDDEF_SEEN\n"
        f"typedef {_unsigned(pointer)} size_t;\ntypedef {pointer} ptrdiff_t;\n"
        "#define NULL ((void *)0)\n#endif\n"
    )


def _limits(model: DataModel) -> str:
    lines = ["#define CHAR_BIT 8", "#define SCHAR_MAX 127", "#define SCHAR_MIN (-128)"]
    lines.append("#define UCHAR_MAX 255")
    kinds = (
        ("SHRT", "USHRT", 16, ""),
        ("INT", "UINT", model.int_bits, ""),
        ("LONG", "ULONG", model.long_bits, "L"),
        ("LLONG", "ULLONG", 64, "LL"),
    )
    for name, unsigned, bits, suffix in kinds:
        most = (1 << bits - 1) - 1
        lines.append(f"#define {name}_MAX {most}{suffix}")
        lines.append(f"#define {name}_MIN (-{most}{suffix} - 1)")
        sign = "" if bits < model.int_bits else "U"
        lines.append(f"#define {unsigned}_MAX {(1 << bits) - 1}{sign}{suffix}")
    if model.char_signed:
        lines += ["#define CHAR_MAX SCHAR_MAX", "#define CHAR_MIN SCHAR_MIN"]
    else:
        lines += ["#define CHAR_MAX UCHAR_MAX", "#define CHAR_MIN 0"]
    return "\n".join(lines) + "\n"
