"""A blur written by hand, as a user would bring it, and ways to get it wrong."""

from pathlib import Path

from guardbit.fit.resolve import resolve
from guardbit.model.enums import Container
from guardbit.model.routine import Entry, Probe, Role, Routine, SourceFile
from guardbit.model.sizing import Interval, Sizing
from guardbit.sizing.analyse import analyse
from guardbit.spec.reader import parse_spec

SPEC = """
[filter]
name = "blur3"
[kernel]
taps = [[1, 2, 1], [2, 4, 2], [1, 2, 1]]
divisor = 16
[input]
bits = 8
[accumulator]
bits = 16
[border]
mode = "replicate"
[image]
width = [1, 64]
height = [1, 64]
"""

SOURCE = """
#include <stddef.h>
#include <stdint.h>

int blur3_frame(const uint8_t *src, size_t src_stride, uint8_t *dst, size_t dst_stride,
                size_t width, size_t height, int32_t *scratch, size_t scratch_len);
int blur3_band(const uint8_t *src, size_t src_stride, uint8_t *dst, size_t dst_stride,
               size_t width, size_t height, size_t from, size_t to,
               int32_t *scratch, size_t scratch_len);
void blur3_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height);

static uint8_t blur3_tail(int32_t sum)
{
    return (uint8_t)((sum + 8) / 16);
}

static size_t blur3_fold(size_t at, size_t length)
{
    /* the position is one up, so that it is never negative */
    return at == 0 ? 0 : at > length ? length - 1 : at - 1;
}

void blur3_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    *out_width = width;
    *out_height = height;
}

int blur3_band(const uint8_t *src, size_t src_stride, uint8_t *dst, size_t dst_stride,
               size_t width, size_t height, size_t from, size_t to,
               int32_t *scratch, size_t scratch_len)
{
    static const int32_t taps[3] = { 1, 2, 1 };
    size_t x, y, k;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return 1;
    }
    if (width < 1 || width > 64 || height < 1 || height > 64 || from > to || to > height) {
        return 2;
    }
    if (src_stride < width || dst_stride < width) {
        return 3;
    }
    if (scratch_len < width) {
        return 4;
    }
    for (y = from; y < to; y++) {
        for (x = 0; x < width; x++) {
            scratch[x] = 0;
            for (k = 0; k < 3; k++) {
                scratch[x] += taps[k] * src[blur3_fold(y + k, height) * src_stride + x];
            }
        }
        for (x = 0; x < width; x++) {
            int32_t sum = 0;

            for (k = 0; k < 3; k++) {
                sum += taps[k] * scratch[blur3_fold(x + k, width)];
            }
            dst[(y - from) * dst_stride + x] = blur3_tail(sum);
        }
    }
    return 0;
}

int blur3_frame(const uint8_t *src, size_t src_stride, uint8_t *dst, size_t dst_stride,
                size_t width, size_t height, int32_t *scratch, size_t scratch_len)
{
    return blur3_band(src, src_stride, dst, dst_stride, width, height, 0, height,
                      scratch, scratch_len);
}
"""

_FRAME = (
    Role.SRC,
    Role.SRC_STRIDE,
    Role.DST,
    Role.DST_STRIDE,
    Role.WIDTH,
    Role.HEIGHT,
    Role.SCRATCH,
    Role.SCRATCH_LEN,
)
_BAND = (*_FRAME[:6], Role.FROM, Role.TO, *_FRAME[6:])

PROBE = Probe("blur3_tail", "blur3.c", 32, Interval(0, 4080), 0, preloaded=False, remove=0)

STORE = "dst[(y - from) * dst_stride + x] = blur3_tail(sum);"
START = "    for (y = from; y < to; y++) {"

# what is replaced by what, the kind of finding that must come, and the rung that must say it
DEFECTS = {
    "wrong tap": ("taps[3] = { 1, 2, 1 }", "taps[3] = { 1, 2, 2 }", "output-differs", "impulses"),
    "wrong border": (
        "at == 0 ? 0 : at > length ? length - 1 : at - 1",
        "at == 0 ? (length > 1) : at > length ? length - 1 : at - 1",
        "output-differs",
        "impulses",
    ),
    "wrong rounding": ("(sum + 8) / 16", "(sum + 7) / 16", "output-differs", "impulses"),
    "tail only": ("(sum + 8) / 16", "(sum + 7) / 16", "requantiser-differs", "requantiser"),
    "write behind": (
        STORE,
        STORE + " dst[(y - from) * dst_stride + width] = 0;",
        "harm-crash",
        "frames",
    ),
    "write in gap": (
        STORE,
        STORE + " if (x + 1 == width && y + 1 < to && dst_stride > width) { "
        "dst[(y - from) * dst_stride + width] = 0; }",
        "harm-wrote-outside",
        "frames",
    ),
    "crash": (
        START,
        "    if (width == 3) { *(volatile uint8_t *)(uintptr_t)(width - 3) = 0; }\n" + START,
        "harm-crash",
        "impulses",
    ),
    "endless": (
        START,
        "    for (;;) { volatile size_t z = width; if (z != 2) { break; } }\n" + START,
        "harm-hang",
        "impulses",
    ),
    "changed source": (
        START,
        "    *(uint8_t *)(uintptr_t)(src + (width - 1)) ^= 1;\n" + START,
        "harm-changed-source",
        "frames",
    ),
    "wrong stride": (
        "height) * src_stride + x]",
        "height) * width + x]",
        "*",
        "frames",
    ),
    "stale scratch": (
        "scratch[x] = 0;",
        "if (x + 1 < width || width < 4) { scratch[x] = 0; }",
        "harm-unsettled",
        "frames",
    ),
    "cell left out": (
        "        for (x = 0; x < width; x++) {\n            int32_t sum",
        "        for (x = width > 5; x < width; x++) {\n            int32_t sum",
        "output-differs",
        "frames",
    ),
    "scratch overrun": (
        START,
        "    scratch[scratch_len] = 7;\n" + START,
        "*",
        "frames",
    ),
    "no size check": (
        "height > 64 || from > to",
        "height > 65 || from > to",
        "*",
        "calls",
    ),
    "wrong band rows": ("(y - from) * dst_stride", "y * dst_stride", "*", "bands"),
    "wrong size told": (
        "*out_height = height;",
        "*out_height = height + 1;",
        "size-differs",
        "frames",
    ),
}


OVERFLOWING = SOURCE.replace(
    "int32_t sum = 0;",
    "int32_t sum = 0; volatile int32_t big = 2147483647; big += (int32_t)width;",
)
"""Undefined behaviour that does not change a result."""


def sizing(spec: str = SPEC) -> Sizing:
    """Return the sizing of a spec's text."""
    return analyse(resolve(parse_spec(spec, "blur3.toml", Path())))


def routine(source: str = SOURCE) -> Routine:
    """Return the blur as a routine."""
    return Routine(
        name="blur3",
        sources=(SourceFile("blur3.c", source),),
        frame=Entry("blur3_frame", _FRAME),
        band=Entry("blur3_band", _BAND),
        output_size="blur3_output_size",
        source=Container.U8,
        destination=Container.U8,
        channels=1,
        word=(32, True),
        scratch_per_column=1,
        scratch_fixed=0,
        widths=(1, 64),
        heights=(1, 64),
    )


def broken(name: str) -> Routine:
    """Return the blur with one defect."""
    old, new, _, _ = DEFECTS[name]
    assert old in SOURCE, name
    return routine(SOURCE.replace(old, new))
