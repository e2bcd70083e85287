/* slope_x.c - a two-dimensional filter in integer arithmetic
 *
 * Horizontal slope per pixel, exact, three fraction bits
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 3597e140c3f9e4adedc3835985fe8c61d62921b308b8a4e41bc834fafedcaa91.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "slope_x.h"

#if SLOPE_X_EDITION != 0xf1e4dd0d
#error "these files were not emitted together"
#endif

/* Fill `row` with row e of the source, columns 0 to width - 1. */
static void slope_x_load(const uint8_t *src, size_t src_stride, size_t width, uint32_t e,
    slope_x_word *SLOPE_X_RESTRICT row)
{
    const uint8_t *const line = src + (size_t)e * src_stride;
    const int32_t columns = (int32_t)width;
    int32_t x;

    for (x = 0; x < columns; x++) {
        row[x] = line[x];
    }
}

/* acc, which legal sources keep within -32768 to 32767. acc is -1020 to 1020. */
static int16_t slope_x_requantise(int32_t acc)
{
    return (int16_t)acc;
}

/* Compute one output row. `top` is the extended row that the uppermost tap reads.
 *
 * Coefficients of the pixels about the output, rows -1 to 1, columns -1 to 1:
 *   -1    0    1
 *   -2    0    2
 *   -1    0    1
 */
static void slope_x_row(const slope_x_word *ring, size_t pitch, uint32_t top, size_t count,
    int16_t *SLOPE_X_RESTRICT dst)
{
    const slope_x_word *const r0 = ring + (size_t)(top % 3) * pitch;
    const slope_x_word *const r1 = ring + (size_t)((top + 1) % 3) * pitch;
    const slope_x_word *const r2 = ring + (size_t)((top + 2) % 3) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        /* -1020 to 1020 at the end, for legal codes */
        int32_t acc = 0;

        acc += -r0[i] + r0[i + 2];
        acc += -2 * r1[i] + 2 * r1[i + 2];
        acc += -r2[i] + r2[i + 2];
        dst[i] = slope_x_requantise(acc);
    }
}

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int slope_x_sizes(size_t width, size_t height, size_t *out_width, size_t *out_height)
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

void slope_x_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    (void)slope_x_sizes(width, height, out_width, out_height);
}

int slope_x_band(
    const uint8_t *SLOPE_X_RESTRICT src, size_t src_stride,
    int16_t *SLOPE_X_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    slope_x_word *SLOPE_X_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return SLOPE_X_BAD_POINTER;
    }
    if (!slope_x_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return SLOPE_X_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_width) {
        return SLOPE_X_BAD_STRIDE;
    }
    if (out_width == 0 || from == to) {
        return SLOPE_X_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len / 3 < (uint32_t)width) {
        return SLOPE_X_BAD_SCRATCH;
    }
    pitch = width;
    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        /* rows that two output rows read are still in the ring */
        if (next < top) {
            next = top;
        }
        for (; next < top + 3; next++) {
            slope_x_load(src, src_stride, width, next, scratch + (size_t)(next % 3) * pitch);
        }
        slope_x_row(scratch, pitch, top, out_width, dst + (row - from) * dst_stride);
    }
    return SLOPE_X_OK;
}

int slope_x_frame(
    const uint8_t *SLOPE_X_RESTRICT src, size_t src_stride,
    int16_t *SLOPE_X_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    slope_x_word *SLOPE_X_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    slope_x_output_size(width, height, &out_width, &out_height);
    return slope_x_band(src, src_stride, dst, dst_stride, width, height, 0, out_height, scratch,
        scratch_len);
}
