/* raw_smooth.c - a two-dimensional filter in integer arithmetic
 *
 * Gaussian on 12-bit raw data, black level kept
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * fffc2f8b083433588f5f66316610ebe4d359baaa955e7214f9ccf7ff87c96bb3.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#include "raw_smooth.h"

#if RAW_SMOOTH_EDITION != 0xa0bf2fdb
#error "these files were not emitted together"
#endif

/* Index of the pixel that position `at` of an axis reads: mirrored, with the pixel of the
 * edge twice. */
static int32_t raw_smooth_index(int32_t at, int32_t length)
{
    const int32_t period = 2 * length;
    const int32_t rest = at % period;
    const int32_t phase = rest < 0 ? rest + period : rest;

    return phase < length ? phase : period - 1 - phase;
}

/* The number that is summed for a code: less the pedestal 256. */
static raw_smooth_word raw_smooth_number(uint16_t code)
{
    return (raw_smooth_word)((int32_t)code - 256);
}

/* Fill `row` with row e - 2 of the source, columns -2 to width + 1, extended by the border. */
static void raw_smooth_load(const uint16_t *src, size_t src_stride, size_t width, size_t height,
    uint32_t e, raw_smooth_word *RAW_SMOOTH_RESTRICT row)
{
    const int32_t y = raw_smooth_index((int32_t)e - 2, (int32_t)height);
    const uint16_t *const line = src + (size_t)y * src_stride;
    const int32_t columns = (int32_t)width + 4;
    int32_t x;

    for (x = 0; x < 2; x++) {
        row[x] = raw_smooth_number(line[raw_smooth_index(x - 2, (int32_t)width)]);
    }
    for (; x < (int32_t)width + 2; x++) {
        row[x] = raw_smooth_number(line[x - 2]);
    }
    for (; x < columns; x++) {
        row[x] = raw_smooth_number(line[raw_smooth_index(x - 2, (int32_t)width)]);
    }
}

/* acc / 2^14, rounded to nearest, ties to even, plus the pedestal 256, held to 64 to 4032.
 * acc is -3145728 to 61865984, so that no code leaves these limits. */
static uint16_t raw_smooth_requantise(int32_t acc)
{
    const int32_t t = acc + 3153920;
    const int32_t q = t >> 14;
    const int32_t code = q - (t % 16384 == 0 && q % 2 != 0) + 64;

    return (uint16_t)code;
}

/* Compute one output row. `top` is the extended row that the uppermost tap reads. Operands are
 * widened first: int may have 16 bits.
 *
 * Coefficients of the pixels about the output, rows -2 to 2, columns -2 to 2:
 *     82    284    428    284     82
 *    284    979   1480    979    284
 *    428   1480   2236   1480    428
 *    284    979   1480    979    284
 *     82    284    428    284     82
 */
static void raw_smooth_row(const raw_smooth_word *ring, size_t pitch, uint32_t top,
    size_t count, uint16_t *RAW_SMOOTH_RESTRICT dst)
{
    const raw_smooth_word *const r0 = ring + (size_t)(top % 5) * pitch;
    const raw_smooth_word *const r1 = ring + (size_t)((top + 1) % 5) * pitch;
    const raw_smooth_word *const r2 = ring + (size_t)((top + 2) % 5) * pitch;
    const raw_smooth_word *const r3 = ring + (size_t)((top + 3) % 5) * pitch;
    const raw_smooth_word *const r4 = ring + (size_t)((top + 4) % 5) * pitch;
    size_t i;

    for (i = 0; i < count; i++) {
        /* -3145728 to 61865984 at the end, for legal codes */
        int32_t acc = 0;

        acc += 82 * (int32_t)r0[i] + 284 * (int32_t)r0[i + 1] + 428 * (int32_t)r0[i + 2]
            + 284 * (int32_t)r0[i + 3] + 82 * (int32_t)r0[i + 4];
        acc += 284 * (int32_t)r1[i] + 979 * (int32_t)r1[i + 1]
            + 1480 * (int32_t)r1[i + 2] + 979 * (int32_t)r1[i + 3]
            + 284 * (int32_t)r1[i + 4];
        acc += 428 * (int32_t)r2[i] + 1480 * (int32_t)r2[i + 1]
            + 2236 * (int32_t)r2[i + 2] + 1480 * (int32_t)r2[i + 3]
            + 428 * (int32_t)r2[i + 4];
        acc += 284 * (int32_t)r3[i] + 979 * (int32_t)r3[i + 1]
            + 1480 * (int32_t)r3[i + 2] + 979 * (int32_t)r3[i + 3]
            + 284 * (int32_t)r3[i + 4];
        acc += 82 * (int32_t)r4[i] + 284 * (int32_t)r4[i + 1] + 428 * (int32_t)r4[i + 2]
            + 284 * (int32_t)r4[i + 3] + 82 * (int32_t)r4[i + 4];
        dst[i] = raw_smooth_requantise(acc);
    }
}

/* Whether every code of the source row that extended row e shows is in 64 to 4032. */
static int raw_smooth_is_legal(const uint16_t *src, size_t src_stride, size_t width,
    size_t height, uint32_t e)
{
    const int32_t y = raw_smooth_index((int32_t)e - 2, (int32_t)height);
    const uint16_t *const line = src + (size_t)y * src_stride;
    size_t x;

    for (x = 0; x < width; x++) {
        if (line[x] < 64 || line[x] > 4032) {
            return 0;
        }
    }
    return 1;
}

/* Whether every source row that output rows `from` to `to` - 1 read is legal. */
static int raw_smooth_are_legal(const uint16_t *src, size_t src_stride, size_t width,
    size_t height, size_t from, size_t to)
{
    uint32_t next = 0;
    size_t row;

    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        if (next < top) {
            next = top;
        }
        for (; next < top + 5; next++) {
            if (!raw_smooth_is_legal(src, src_stride, width, height, next)) {
                return 0;
            }
        }
    }
    return 1;
}

/* Tell the size of the output; returns 0, and the size is 0 x 0, if the source's is not legal. */
static int raw_smooth_sizes(size_t width, size_t height, size_t *out_width, size_t *out_height)
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

void raw_smooth_output_size(size_t width, size_t height, size_t *out_width, size_t *out_height)
{
    (void)raw_smooth_sizes(width, height, out_width, out_height);
}

int raw_smooth_band(
    const uint16_t *RAW_SMOOTH_RESTRICT src, size_t src_stride,
    uint16_t *RAW_SMOOTH_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    raw_smooth_word *RAW_SMOOTH_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;
    uint32_t next = 0;
    size_t pitch;
    size_t row;

    if (src == NULL || dst == NULL || scratch == NULL) {
        return RAW_SMOOTH_BAD_POINTER;
    }
    if (!raw_smooth_sizes(width, height, &out_width, &out_height)
        || from > to || to > out_height) {
        return RAW_SMOOTH_BAD_SIZE;
    }
    if (src_stride < width || dst_stride < out_width) {
        return RAW_SMOOTH_BAD_STRIDE;
    }
    if (from == to) {
        return RAW_SMOOTH_OK;
    }
    /* the extended width takes more bits than size_t may have */
    if (scratch_len / 5 < (uint32_t)width + 4) {
        return RAW_SMOOTH_BAD_SCRATCH;
    }
    if (!raw_smooth_are_legal(src, src_stride, width, height, from, to)) {
        return RAW_SMOOTH_BAD_CODE;
    }
    pitch = width + 4;
    for (row = from; row < to; row++) {
        const uint32_t top = (uint32_t)row;

        /* rows that two output rows read are still in the ring */
        if (next < top) {
            next = top;
        }
        for (; next < top + 5; next++) {
            raw_smooth_load(src, src_stride, width, height, next,
                scratch + (size_t)(next % 5) * pitch);
        }
        raw_smooth_row(scratch, pitch, top, out_width, dst + (row - from) * dst_stride);
    }
    return RAW_SMOOTH_OK;
}

int raw_smooth_frame(
    const uint16_t *RAW_SMOOTH_RESTRICT src, size_t src_stride,
    uint16_t *RAW_SMOOTH_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    raw_smooth_word *RAW_SMOOTH_RESTRICT scratch, size_t scratch_len)
{
    size_t out_width;
    size_t out_height;

    raw_smooth_output_size(width, height, &out_width, &out_height);
    return raw_smooth_band(src, src_stride, dst, dst_stride, width, height, 0, out_height,
        scratch, scratch_len);
}
