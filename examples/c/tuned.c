/* tuned.c - a two-dimensional filter in integer arithmetic
 *
 * Sharpening with taps that are loaded at run time, level kept
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * da7033133f74058eeb022c2cd9e805436665de4ac7763cc6ed264dfc40b7d696.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "tuned.h"

#if TUNED_EDITION != 0x2c26878c
#error "these files were not emitted together"
#endif

/* Index of the pixel that position `at` of an axis reads: the nearest pixel of the edge. */
static int32_t tuned_index(int32_t at, int32_t length)
{
    if (at < 0) {
        return 0;
    }
    return at < length ? at : length - 1;
}

/* Fill `row` with row e - 1 of the source, columns -1 to width, extended by the border. */
static void tuned_load(const uint8_t *src, size_t src_stride, size_t width, size_t height,
    uint32_t e, tuned_word *TUNED_RESTRICT row)
{
    const int32_t y = tuned_index((int32_t)e - 1, (int32_t)height);
    const uint8_t *const line = src + (size_t)y * src_stride;
    int32_t x;

    row[0] = line[0];
    for (x = 1; x < (int32_t)width + 1; x++) {
        row[x] = line[x - 1];
    }
    row[x] = line[width - 1];
}

/* acc / 2^4, rounded to nearest, ties toward plus infinity, held to 0 to 255. acc is -18360
 * to 22440. */
static uint8_t tuned_requantise(int32_t acc)
{
    const int32_t code = ((acc + 18360) >> 4) - 1147;

    if (code < 0) {
        return 0;
    }
    if (code > 255) {
        return 255;
    }
    return (uint8_t)code;
}

/* Compute one output row. `top` is the extended row that the uppermost tap reads.
 *
 * Which of the taps multiplies each pixel about the output, rows -1 to 1, columns -1 to 1:
 *   8   7   6
 *   5   4   3
 *   2   1   0
 */
static void tuned_row(const tuned_word *ring, size_t pitch, uint32_t top, size_t count,
    const int8_t *taps, uint8_t *TUNED_RESTRICT dst)
{
    const tuned_word *const r0 = ring + (size_t)(top % 3) * pitch;
    const tuned_word *const r1 = ring + (size_t)((top + 1) % 3) * pitch;
    const tuned_word *const r2 = ring + (size_t)((top + 2) % 3) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        /* -18360 to 22440 at the end, for legal codes and taps */
        int32_t acc = 0;

        acc += taps[8] * r0[i] + taps[7] * r0[i + 1] + taps[6] * r0[i + 2];
        acc += taps[5] * r1[i] + taps[4] * r1[i + 1] + taps[3] * r1[i + 2];
        acc += taps[2] * r2[i] + taps[1] * r2[i + 1] + taps[0] * r2[i + 2];
        dst[i] = tuned_requantise(acc);
    }
}

int tuned_check_taps(const int8_t *taps)
{
    static const int8_t least[TUNED_TAPS] = {
        -4, -16, -4, -16, 16, -16, -4, -16, -4
    };
    static const int8_t greatest[TUNED_TAPS] = {
        4, 0, 4, 0, 96, 0, 4, 0, 4
    };
    int32_t sum = 0;
    int32_t size = 0;
    size_t k;

    /* taps within their limits add up to no more than int32_t holds */
    for (k = 0; k < TUNED_TAPS; k++) {
        if (taps[k] < least[k] || taps[k] > greatest[k]) {
            return TUNED_BAD_TAPS;
        }
        sum += taps[k];
        size += taps[k] < 0 ? -(int32_t)taps[k] : taps[k];
    }
    return sum == 16 && size <= 160 ? TUNED_OK : TUNED_BAD_TAPS;
}

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int tuned_sizes(size_t width, size_t height, size_t *out_width, size_t *out_height)
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

void tuned_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    (void)tuned_sizes(width, height, out_width, out_height);
}

int tuned_band(
    const uint8_t *TUNED_RESTRICT src, size_t src_stride,
    uint8_t *TUNED_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    const int8_t *TUNED_RESTRICT taps,
    tuned_word *TUNED_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || taps == NULL || scratch == NULL) {
        return TUNED_BAD_POINTER;
    }
    if (!tuned_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return TUNED_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_width) {
        return TUNED_BAD_STRIDE;
    }
    if (from == to) {
        return TUNED_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len / 3 < (uint32_t)width + 2) {
        return TUNED_BAD_SCRATCH;
    }
    if (tuned_check_taps(taps) != TUNED_OK) {
        return TUNED_BAD_TAPS;
    }
    pitch = width + 2;
    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        /* rows that two output rows read are still in the ring */
        if (next < top) {
            next = top;
        }
        for (; next < top + 3; next++) {
            tuned_load(src, src_stride, width, height, next,
                scratch + (size_t)(next % 3) * pitch);
        }
        tuned_row(scratch, pitch, top, out_width, taps, dst + (row - from) * dst_stride);
    }
    return TUNED_OK;
}

int tuned_frame(
    const uint8_t *TUNED_RESTRICT src, size_t src_stride,
    uint8_t *TUNED_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    const int8_t *TUNED_RESTRICT taps,
    tuned_word *TUNED_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    tuned_output_size(width, height, &out_width, &out_height);
    return tuned_band(src, src_stride, dst, dst_stride, width, height, 0, out_height, taps,
        scratch, scratch_len);
}
