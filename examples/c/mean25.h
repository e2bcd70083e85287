/* mean25.h - a two-dimensional filter in integer arithmetic
 *
 * Mean of 5x5 pixels, divided by exactly 25
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 1c90915922cd9e0bd6d3185d831b610a834a98897b9302dab22abd2cdff93bf8.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#ifndef MEAN25_H
#define MEAN25_H

#include <stddef.h>
#include <stdint.h>

#if defined(__cplusplus)
#define MEAN25_RESTRICT
extern "C" {
#else
#define MEAN25_RESTRICT restrict
#endif

/* Tells files of other specs or versions apart. */
#define MEAN25_EDITION 0x6bc72830

/*
 * convolution: y[n1, n2] = sum h[k1, k2] * x[n1 - k1, n2 - k2]
 *
 * source          8-bit unsigned, codes 0 to 255
 * border          outside the image: the code 240
 * accumulator     14 bits, two's complement, of which 14 are needed; cannot overflow;
 *                 0 to 6375 at the end, for legal codes
 * requantiser     acc / 25, rounded to nearest, ties toward plus infinity, held to 0 to 255
 * output          8-bit unsigned, codes 0 to 255;
 *                 one for each source pixel
 * error           -0.48 to 0.48 LSB of the output code against the ideal filter
 *
 * These bounds hold only for codes inside the declared range of the source. They are
 * engineering evidence, not the work of a qualified tool: verifying the product stays with
 * the engineer who is responsible for it.
 */

/* Element of scratch memory. */
typedef uint8_t mean25_word;

/* Elements of scratch that a call needs for a source of that width. A constant expression if
 * width is one; width may be evaluated more than once. */
#define MEAN25_SCRATCH_LEN(width) ((size_t)5 * ((size_t)(width) + 4))

enum mean25_status {
    MEAN25_OK = 0,
    MEAN25_BAD_POINTER, /* src, dst or scratch is null */
    MEAN25_BAD_SIZE,    /* width, height or the range of rows is not legal */
    MEAN25_BAD_STRIDE,  /* a stride is less than a row */
    MEAN25_BAD_SCRATCH, /* scratch_len is too small */
    MEAN25_BAD_CODE     /* never returned by this filter */
};

/* Filter a frame.
 *
 * src          first element of the source; rows start src_stride elements apart
 * dst          first element of the output; rows start dst_stride elements apart
 * width        columns of the source in pixels, 1 to 65535
 * height       rows of the source, 1 to 65535
 * scratch      working memory: its contents do not matter before and mean nothing after
 * scratch_len  elements of scratch, at least MEAN25_SCRATCH_LEN(width)
 *
 * src, dst and scratch must not overlap. mean25_output_size tells the size of
 * the output; elements of dst between its rows are left alone. Nothing is written unless the
 * status is MEAN25_OK.
 *
 * Returns an enum mean25_status.
 */
int mean25_frame(
    const uint8_t *MEAN25_RESTRICT src, size_t src_stride,
    uint8_t *MEAN25_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    mean25_word *MEAN25_RESTRICT scratch, size_t scratch_len);

/* Filter output rows `from` to `to` - 1 only: dst is where row `from` goes, src still the
 * first element of the whole frame. Any split of a frame into bands gives the same output.
 *
 * Returns an enum mean25_status.
 */
int mean25_band(
    const uint8_t *MEAN25_RESTRICT src, size_t src_stride,
    uint8_t *MEAN25_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    mean25_word *MEAN25_RESTRICT scratch, size_t scratch_len);

/* Tell the size of the output, in pixels; both are 0 for a source size that is not legal. */
void mean25_output_size(size_t width, size_t height,
    size_t *out_width, size_t *out_height);

#if defined(__cplusplus)
}
#endif

#endif
