/* slope_y.c - a two-dimensional filter in integer arithmetic
 *
 * Vertical slope per pixel, exact, three fraction bits
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 46bd095399670a3c87a53f945711ce549d610fd3b7f2443e1c0aa15ead8b9aef.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "slope_y.h"

#if SLOPE_Y_EDITION != 0x0c2dcc2d
#error "these files were not emitted together"
#endif

/* Fill `row` with row e of the source, columns 0 to width - 1. */
static void slope_y_load(const uint8_t *src, size_t src_stride, size_t width, uint32_t e,
    slope_y_word *SLOPE_Y_RESTRICT row)
{
    const uint8_t *const line = src + (size_t)e * src_stride;
    const int32_t columns = (int32_t)width;
    int32_t x;

    for (x = 0; x < columns; x++) {
        row[x] = line[x];
    }
}

/* acc, which legal sources keep within -32768 to 32767. acc is -1020 to 1020. */
static int16_t slope_y_requantise(int32_t acc)
{
    return (int16_t)acc;
}

/* Compute one output row. `top` is the extended row that the uppermost tap reads.
 *
 * Coefficients of the pixels about the output, rows -1 to 1, columns -1 to 1:
 *   -1   -2   -1
 *    0    0    0
 *    1    2    1
 */
static void slope_y_row(const slope_y_word *ring, size_t pitch, uint32_t top, size_t count,
    int16_t *SLOPE_Y_RESTRICT dst)
{
    const slope_y_word *const r0 = ring + (size_t)(top % 3) * pitch;
    const slope_y_word *const r2 = ring + (size_t)((top + 2) % 3) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        /* -1020 to 1020 at the end, for legal codes */
        int32_t acc = 0;

        acc += -r0[i] - 2 * r0[i + 1] - r0[i + 2];
        acc += r2[i] + 2 * r2[i + 1] + r2[i + 2];
        dst[i] = slope_y_requantise(acc);
    }
}

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int slope_y_sizes(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    *out_width = 0;
    *out_height = 0;
    /* a size below the least wraps round */
    if (width - 1u > 65534u || height - 1u > 65534u) {
        return 0;
    }
    *out_width = (size_t)(width > 2 ? (uint32_t)width - 2 : 0);
    *out_height = (size_t)(height > 2 ? (uint32_t)height - 2 : 0);
    return 1;
}

void slope_y_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    (void)slope_y_sizes(width, height, out_width, out_height);
}

int slope_y_band(
    const uint8_t *SLOPE_Y_RESTRICT src, size_t src_stride,
    int16_t *SLOPE_Y_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    slope_y_word *SLOPE_Y_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return SLOPE_Y_BAD_POINTER;
    }
    if (!slope_y_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return SLOPE_Y_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_width) {
        return SLOPE_Y_BAD_STRIDE;
    }
    if (out_width == 0 || from == to) {
        return SLOPE_Y_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len / 3 < (uint32_t)width) {
        return SLOPE_Y_BAD_SCRATCH;
    }
    pitch = width;
    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        /* rows that two output rows read are still in the ring */
        if (next < top) {
            next = top;
        }
        for (; next < top + 3; next++) {
            slope_y_load(src, src_stride, width, next, scratch + (size_t)(next % 3) * pitch);
        }
        slope_y_row(scratch, pitch, top, out_width, dst + (row - from) * dst_stride);
    }
    return SLOPE_Y_OK;
}

int slope_y_frame(
    const uint8_t *SLOPE_Y_RESTRICT src, size_t src_stride,
    int16_t *SLOPE_Y_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    slope_y_word *SLOPE_Y_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    slope_y_output_size(width, height, &out_width, &out_height);
    return slope_y_band(src, src_stride, dst, dst_stride, width, height, 0, out_height, scratch,
        scratch_len);
}
