/* sharpen.h - a two-dimensional filter in integer arithmetic
 *
 * 3x3 sharpening of the panel picture, video levels
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * f688876ce4a61ca45771a5e6d465c843249ba559622563465b2daae7ccac771f.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#ifndef SHARPEN_H
#define SHARPEN_H

#include <stddef.h>
#include <stdint.h>

#if defined(__cplusplus)
#define SHARPEN_RESTRICT
extern "C" {
#else
#define SHARPEN_RESTRICT restrict
#endif

/* Tells files of other specs or versions apart. */
#define SHARPEN_EDITION 0x23fb6697

/*
 * convolution: y[n1, n2] = sum h[k1, k2] * x[n1 - k1, n2 - k2]
 *
 * source          8-bit unsigned, codes 16 to 235, 16 stands for zero;
 *                 other codes are clamped to the range before use
 * border          outside the image: the nearest pixel of the edge
 * accumulator     12 bits, two's complement, of which 12 are needed; cannot overflow;
 *                 -876 to 1752 at the end, for legal codes
 * requantiser     acc / 2^2, rounded to nearest, ties away from zero, plus the pedestal 16,
 *                 held to 16 to 235
 * output          8-bit unsigned, codes 16 to 235, 16 stands for zero;
 *                 one for each source pixel; 3 interleaved channels
 * error           -0.25 to 0.5 LSB of the output code against the ideal filter
 *
 * These bounds hold only for codes inside the declared range of the source. They are
 * engineering evidence, not the work of a qualified tool: verifying the product stays with
 * the engineer who is responsible for it.
 */

/* Element of scratch memory. */
typedef uint8_t sharpen_word;

/* Elements of scratch that a call needs for a source of that width. A constant expression if
 * width is one; width may be evaluated more than once. */
#define SHARPEN_SCRATCH_LEN(width) ((size_t)9 * ((size_t)(width) + 2))

enum sharpen_status {
    SHARPEN_OK = 0,
    SHARPEN_BAD_POINTER, /* src, dst or scratch is null */
    SHARPEN_BAD_SIZE,    /* width, height or the range of rows is not legal */
    SHARPEN_BAD_STRIDE,  /* a stride is less than a row */
    SHARPEN_BAD_SCRATCH, /* scratch_len is too small */
    SHARPEN_BAD_CODE     /* never returned by this filter */
};

/* Filter a frame.
 *
 * src          first element of the source; rows start src_stride elements apart
 * dst          first element of the output; rows start dst_stride elements apart
 * width        columns of the source in pixels, 16 to 1280
 * height       rows of the source, 16 to 800
 * scratch      working memory: its contents do not matter before and mean nothing after
 * scratch_len  elements of scratch, at least SHARPEN_SCRATCH_LEN(width)
 *
 * A pixel is 3 elements, one of each channel.
 *
 * src, dst and scratch must not overlap. sharpen_output_size tells the size of
 * the output; elements of dst between its rows are left alone. Nothing is written unless the
 * status is SHARPEN_OK.
 *
 * Returns an enum sharpen_status.
 */
int sharpen_frame(
    const uint8_t *SHARPEN_RESTRICT src, size_t src_stride,
    uint8_t *SHARPEN_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    sharpen_word *SHARPEN_RESTRICT scratch, size_t scratch_len);

/* Filter output rows `from` to `to` - 1 only: dst is where row `from` goes, src still the
 * first element of the whole frame. Any split of a frame into bands gives the same output.
 *
 * Returns an enum sharpen_status.
 */
int sharpen_band(
    const uint8_t *SHARPEN_RESTRICT src, size_t src_stride,
    uint8_t *SHARPEN_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    sharpen_word *SHARPEN_RESTRICT scratch, size_t scratch_len);

/* Tell the size of the output, in pixels; both are 0 for a source size that is not legal. */
void sharpen_output_size(size_t width, size_t height,
    size_t *out_width, size_t *out_height);

#if defined(__cplusplus)
}
#endif

#endif
