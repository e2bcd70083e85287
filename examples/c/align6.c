/* align6.c - a two-dimensional filter in integer arithmetic
 *
 * Half-pixel shift, six taps, two passes with 8 bits in between
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 2377bc762dc7a96b0fa82494f6eb226793cdee3367bdff59a4e7e42d6930fc24.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "align6.h"

#if ALIGN6_EDITION != 0xd052ddc6
#error "these files were not emitted together"
#endif

/* Index of the pixel that position `at` of an axis reads: the nearest pixel of the edge. */
static int32_t align6_index(int32_t at, int32_t length)
{
    if (at < 0) {
        return 0;
    }
    return at < length ? at : length - 1;
}

/* Fill `row` with row e - 2 of the source, columns -2 to width + 2, extended by the border. */
static void align6_extend(const uint8_t *src, size_t src_stride, size_t width, size_t height,
    uint32_t e, align6_word *ALIGN6_RESTRICT row)
{
    const int32_t y = align6_index((int32_t)e - 2, (int32_t)height);
    const uint8_t *const line = src + (size_t)y * src_stride;
    const int32_t columns = (int32_t)width + 5;
    int32_t x;

    for (x = 0; x < 2; x++) {
        row[x] = line[0];
    }
    for (; x < (int32_t)width + 2; x++) {
        row[x] = line[x - 2];
    }
    for (; x < columns; x++) {
        row[x] = line[width - 1];
    }
}

/* acc / 2^7, rounded to nearest, ties toward plus infinity (acc started at one half), held
 * to 0 to 255. acc is -8096 to 40864. */
static align6_word align6_first_requantise(int32_t acc)
{
    const int32_t code = ((acc + 8192) >> 7) - 64;

    if (code < 0) {
        return 0;
    }
    if (code > 255) {
        return 255;
    }
    return (align6_word)code;
}

/* The first pass, along the rows: one row of intermediate codes. Operands are widened first:
 * int may have 16 bits.
 *
 * Coefficients of the pixels about the output, row 0, columns -2 to 3:
 *     3   -16    77    77   -16     3
 */
static void align6_first(const align6_word *r0, size_t count, align6_word *ALIGN6_RESTRICT row)
{
    size_t i;

    for (i = 0; i < count; i++) {
        /* -8096 to 40864 at the end, for legal codes */
        int32_t acc = 64;

        acc += 3 * (int32_t)r0[i] - 16 * (int32_t)r0[i + 1] + 77 * (int32_t)r0[i + 2]
            + 77 * (int32_t)r0[i + 3] - 16 * (int32_t)r0[i + 4]
            + 3 * (int32_t)r0[i + 5];
        row[i] = align6_first_requantise(acc);
    }
}

/* acc / 2^7, rounded to nearest, ties toward plus infinity (acc started at one half), held
 * to 0 to 255. acc is -8096 to 40864. */
static uint8_t align6_second_requantise(int32_t acc)
{
    const int32_t code = ((acc + 8192) >> 7) - 64;

    if (code < 0) {
        return 0;
    }
    if (code > 255) {
        return 255;
    }
    return (uint8_t)code;
}

/* The second pass, down the columns: one output row.
 *
 * Coefficients of the pixels about the output, rows -2 to 3, column 0:
 *     3
 *   -16
 *    77
 *    77
 *   -16
 *     3
 */
static void align6_row(const align6_word *ring, size_t pitch, uint32_t top, size_t count,
    uint8_t *ALIGN6_RESTRICT dst)
{
    const align6_word *const r0 = ring + (size_t)(top % 6) * pitch;
    const align6_word *const r1 = ring + (size_t)((top + 1) % 6) * pitch;
    const align6_word *const r2 = ring + (size_t)((top + 2) % 6) * pitch;
    const align6_word *const r3 = ring + (size_t)((top + 3) % 6) * pitch;
    const align6_word *const r4 = ring + (size_t)((top + 4) % 6) * pitch;
    const align6_word *const r5 = ring + (size_t)((top + 5) % 6) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        /* -8096 to 40864 at the end, for legal codes */
        int32_t acc = 64;

        acc += 3 * r0[i];
        acc -= 16 * r1[i];
        acc += 77 * r2[i];
        acc += 77 * r3[i];
        acc -= 16 * r4[i];
        acc += 3 * r5[i];
        dst[i] = align6_second_requantise(acc);
    }
}

/* Load extended row e through the row behind the ring: the first pass takes it from there. */
static void align6_load(const uint8_t *src, size_t src_stride, size_t width, size_t height,
    uint32_t e, size_t pitch, size_t count, align6_word *scratch)
{
    align6_word *const line = scratch + 6 * pitch;

    align6_extend(src, src_stride, width, height, e, line);
    align6_first(line, count, scratch + (size_t)(e % 6) * pitch);
}

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int align6_sizes(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    *out_width = 0;
    *out_height = 0;
    /* a size below the least wraps round */
    if (width - 1u > 65534u || height - 1u > 65534u) {
        return 0;
    }
    *out_width = width;
    *out_height = height;
    return 1;
}

void align6_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    (void)align6_sizes(width, height, out_width, out_height);
}

int align6_band(
    const uint8_t *ALIGN6_RESTRICT src, size_t src_stride,
    uint8_t *ALIGN6_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    align6_word *ALIGN6_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return ALIGN6_BAD_POINTER;
    }
    if (!align6_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return ALIGN6_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_width) {
        return ALIGN6_BAD_STRIDE;
    }
    if (from == to) {
        return ALIGN6_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len / 7 < (uint32_t)width + 5) {
        return ALIGN6_BAD_SCRATCH;
    }
    pitch = width + 5;
    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        /* rows that two output rows read are still in the ring */
        if (next < top) {
            next = top;
        }
        for (; next < top + 6; next++) {
            align6_load(src, src_stride, width, height, next, pitch, out_width, scratch);
        }
        align6_row(scratch, pitch, top, out_width, dst + (row - from) * dst_stride);
    }
    return ALIGN6_OK;
}

int align6_frame(
    const uint8_t *ALIGN6_RESTRICT src, size_t src_stride,
    uint8_t *ALIGN6_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    align6_word *ALIGN6_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    align6_output_size(width, height, &out_width, &out_height);
    return align6_band(src, src_stride, dst, dst_stride, width, height, 0, out_height, scratch,
        scratch_len);
}
