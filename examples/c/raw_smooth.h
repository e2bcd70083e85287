/* raw_smooth.h - a two-dimensional filter in integer arithmetic
 *
 * Gaussian on 12-bit raw data, black level kept
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * fffc2f8b083433588f5f66316610ebe4d359baaa955e7214f9ccf7ff87c96bb3.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#ifndef RAW_SMOOTH_H
#define RAW_SMOOTH_H

#include <stddef.h>
#include <stdint.h>

#if defined(__cplusplus)
#define RAW_SMOOTH_RESTRICT
extern "C" {
#else
#define RAW_SMOOTH_RESTRICT restrict
#endif

/* Tells files of other specs or versions apart. */
#define RAW_SMOOTH_EDITION 0xa0bf2fdb

/*
 * convolution: y[n1, n2] = sum h[k1, k2] * x[n1 - k1, n2 - k2]
 *
 * source          12-bit unsigned, codes 64 to 4032, 256 stands for zero;
 *                 other codes are refused before anything is written
 * border          outside the image: mirrored, with the pixel of the edge twice
 * accumulator     27 bits, two's complement, of which 27 are needed; cannot overflow;
 *                 -3145728 to 61865984 at the end, for legal codes
 * requantiser     acc / 2^14, rounded to nearest, ties to even, plus the pedestal 256, held to
 *                 64 to 4032
 * output          12-bit unsigned, codes 64 to 4032, 256 stands for zero;
 *                 one for each source pixel
 * error           -1.5922 to 1.5922 LSB of the output code against the ideal filter
 *
 * These bounds hold only for codes inside the declared range of the source. They are
 * engineering evidence, not the work of a qualified tool: verifying the product stays with
 * the engineer who is responsible for it.
 */

/* Element of scratch memory. */
typedef int16_t raw_smooth_word;

/* Elements of scratch that a call needs for a source of that width. A constant expression if
 * width is one; width may be evaluated more than once. */
#define RAW_SMOOTH_SCRATCH_LEN(width) ((size_t)5 * ((size_t)(width) + 4))

enum raw_smooth_status {
    RAW_SMOOTH_OK = 0,
    RAW_SMOOTH_BAD_POINTER, /* src, dst or scratch is null */
    RAW_SMOOTH_BAD_SIZE,    /* width, height or the range of rows is not legal */
    RAW_SMOOTH_BAD_STRIDE,  /* a stride is less than a row */
    RAW_SMOOTH_BAD_SCRATCH, /* scratch_len is too small */
    RAW_SMOOTH_BAD_CODE     /* a code of a row that is read is outside 64 to 4032 */
};

/* Filter a frame.
 *
 * src          first element of the source; rows start src_stride elements apart
 * dst          first element of the output; rows start dst_stride elements apart
 * width        columns of the source in pixels, 1 to 65535
 * height       rows of the source, 1 to 65535
 * scratch      working memory: its contents do not matter before and mean nothing after
 * scratch_len  elements of scratch, at least RAW_SMOOTH_SCRATCH_LEN(width)
 *
 * src, dst and scratch must not overlap. raw_smooth_output_size tells the size of
 * the output; elements of dst between its rows are left alone. Nothing is written unless the
 * status is RAW_SMOOTH_OK.
 *
 * Returns an enum raw_smooth_status.
 */
int raw_smooth_frame(
    const uint16_t *RAW_SMOOTH_RESTRICT src, size_t src_stride,
    uint16_t *RAW_SMOOTH_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    raw_smooth_word *RAW_SMOOTH_RESTRICT scratch, size_t scratch_len);

/* Filter output rows `from` to `to` - 1 only: dst is where row `from` goes, src still the
 * first element of the whole frame. Any split of a frame into bands gives the same output.
 *
 * Returns an enum raw_smooth_status.
 */
int raw_smooth_band(
    const uint16_t *RAW_SMOOTH_RESTRICT src, size_t src_stride,
    uint16_t *RAW_SMOOTH_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    raw_smooth_word *RAW_SMOOTH_RESTRICT scratch, size_t scratch_len);

/* Tell the size of the output, in pixels; both are 0 for a source size that is not legal. */
void raw_smooth_output_size(size_t width, size_t height,
    size_t *out_width, size_t *out_height);

#if defined(__cplusplus)
}
#endif

#endif
