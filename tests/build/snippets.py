"""Small routines in C, right and wrong, that turn each code over."""

from guardbit.model.enums import Container
from guardbit.model.routine import Entry, Probe, Role, Routine, SourceFile
from guardbit.model.sizing import Interval

_ROLES = (Role.SRC, Role.SRC_STRIDE, Role.DST, Role.DST_STRIDE, Role.WIDTH, Role.HEIGHT)

_TEXT = """
#include <stddef.h>
#include <stdint.h>

int NAME_frame(const uint8_t *s, size_t ss, uint8_t *d, size_t ds, size_t w, size_t h);

static uint8_t NAME_tail(int32_t code)
{
    return (uint8_t)(LEVEL - code);
}

int NAME_frame(const uint8_t *s, size_t ss, uint8_t *d, size_t ds, size_t w, size_t h)
{
    size_t y, x;

    for (y = 0; y < h; y++) {
        for (x = 0; x < w; x++) {
            d[y * ds + x] = NAME_tail(s[y * ss + x]);
        }
    }
    MORE
    return 0;
}
"""


def turner(name: str = "turn", level: int = 255, more: str = "") -> Routine:
    """Return a routine that writes `level` minus each code, and then does `more`."""
    text = _TEXT.replace("NAME", name).replace("LEVEL", str(level)).replace("MORE", more)
    return Routine(
        name=name,
        sources=(SourceFile(f"{name}.c", text),),
        frame=Entry(f"{name}_frame", _ROLES),
        band=None,
        output_size=None,
        source=Container.U8,
        destination=Container.U8,
        channels=1,
        word=None,
        scratch_per_column=0,
        scratch_fixed=0,
        widths=(1, 100),
        heights=(1, 100),
    )


def tail(name: str = "turn") -> Probe:
    """Return the probe of a turner's static function."""
    return Probe(f"{name}_tail", f"{name}.c", 32, Interval(0, 255), 0, preloaded=False, remove=0)
