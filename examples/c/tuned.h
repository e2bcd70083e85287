/* tuned.h - a two-dimensional filter in integer arithmetic
 *
 * Sharpening with taps that are loaded at run time, level kept
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * da7033133f74058eeb022c2cd9e805436665de4ac7763cc6ed264dfc40b7d696.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#ifndef TUNED_H
#define TUNED_H

#include <stddef.h>
#include <stdint.h>

#if defined(__cplusplus)
#define TUNED_RESTRICT
extern "C" {
#else
#define TUNED_RESTRICT restrict
#endif

/* Tells files of other specs or versions apart. */
#define TUNED_EDITION 0x2c26878c

/*
 * convolution: y[n1, n2] = sum h[k1, k2] * x[n1 - k1, n2 - k2]
 *
 * source          8-bit unsigned, codes 0 to 255
 * border          outside the image: the nearest pixel of the edge
 * coefficients    TUNED_TAPS taps given at each call, row by row of the kernel;
 *                 each is -16 to 96, or has narrower limits of its own;
 *                 their sum is 16;
 *                 their magnitudes add up to at most 160;
 *                 no others are legal
 * accumulator     16 bits, two's complement, of which 16 are needed; cannot overflow;
 *                 -18360 to 22440 at the end, for legal codes and taps
 * requantiser     acc / 2^4, rounded to nearest, ties toward plus infinity, held to 0 to 255
 * output          8-bit unsigned, codes 0 to 255;
 *                 one for each source pixel
 * error           -0.25 to 0.5 LSB of the output code against the ideal filter, with the
 *                 nominal taps
 *
 * These bounds hold only for codes inside the declared range of the source, and all but
 * that of the error for all legal taps. They are engineering evidence, not the work of
 * a qualified tool: verifying the product stays with the engineer who is responsible
 * for it.
 */

/* Element of scratch memory. */
typedef uint8_t tuned_word;

/* Elements of scratch that a call needs for a source of that width. A constant expression if
 * width is one; width may be evaluated more than once. */
#define TUNED_SCRATCH_LEN(width) ((size_t)3 * ((size_t)(width) + 2))

/* Coefficients of the kernel, zeros included. */
#define TUNED_TAPS 9

enum tuned_status {
    TUNED_OK = 0,
    TUNED_BAD_POINTER, /* src, dst, taps or scratch is null */
    TUNED_BAD_SIZE,    /* width, height or the range of rows is not legal */
    TUNED_BAD_STRIDE,  /* a stride is less than a row */
    TUNED_BAD_SCRATCH, /* scratch_len is too small */
    TUNED_BAD_CODE,    /* never returned by this filter */
    TUNED_BAD_TAPS     /* the taps are no legal ones */
};

/* Filter a frame.
 *
 * src          first element of the source; rows start src_stride elements apart
 * dst          first element of the output; rows start dst_stride elements apart
 * width        columns of the source in pixels, 1 to 65535
 * height       rows of the source, 1 to 65535
 * taps         TUNED_TAPS coefficients, row by row of the kernel
 * scratch      working memory: its contents do not matter before and mean nothing after
 * scratch_len  elements of scratch, at least TUNED_SCRATCH_LEN(width)
 *
 * src, dst, taps and scratch must not overlap.
 * tuned_output_size tells the size of the output; elements of
 * dst between its rows are left alone. Nothing is written unless the status is
 * TUNED_OK.
 *
 * The taps are checked at each call, after everything else. The caller sees to it that they do
 * not change during a call, and that all bands of a frame are given the same.
 *
 * Returns an enum tuned_status.
 */
int tuned_frame(
    const uint8_t *TUNED_RESTRICT src, size_t src_stride,
    uint8_t *TUNED_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    const int8_t *TUNED_RESTRICT taps,
    tuned_word *TUNED_RESTRICT scratch, size_t scratch_len);

/* Filter output rows `from` to `to` - 1 only: dst is where row `from` goes, src still the
 * first element of the whole frame. Any split of a frame into bands gives the same output.
 *
 * Returns an enum tuned_status.
 */
int tuned_band(
    const uint8_t *TUNED_RESTRICT src, size_t src_stride,
    uint8_t *TUNED_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    const int8_t *TUNED_RESTRICT taps,
    tuned_word *TUNED_RESTRICT scratch, size_t scratch_len);

/* Tell whether taps are legal ones, which every call checks as well.
 *
 * Returns TUNED_OK or TUNED_BAD_TAPS. `taps` must not be null.
 */
int tuned_check_taps(const int8_t *taps);

/* Tell the size of the output, in pixels; both are 0 for a source size that is not legal. */
void tuned_output_size(size_t width, size_t height,
    size_t *out_width, size_t *out_height);

#if defined(__cplusplus)
}
#endif

#endif
