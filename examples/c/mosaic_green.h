/* mosaic_green.h - a two-dimensional filter in integer arithmetic
 *
 * Green pixels of the red rows, smoothed among themselves, half size
 *
 * Written by guardbit 0.1.0 from the spec with SHA-256
 * 5a59fc62c55c15c11b3898a33fed589f6d6877e47145ef60fc9d50c0d8f26b44.
 * Change the spec and emit again rather than edit this file. It belongs to the owner of the
 * spec, who may use it under any terms; it comes without warranty.
 */
#ifndef MOSAIC_GREEN_H
#define MOSAIC_GREEN_H

#include <stddef.h>
#include <stdint.h>

#if defined(__cplusplus)
#define MOSAIC_GREEN_RESTRICT
extern "C" {
#else
#define MOSAIC_GREEN_RESTRICT restrict
#endif

/* Tells files of other specs or versions apart. */
#define MOSAIC_GREEN_EDITION 0x0c957d06

/*
 * convolution: y[n1, n2] = sum h[k1, k2] * x[n1 - k1, n2 - k2]
 *
 * source          10-bit unsigned, codes 0 to 1023, 64 stands for zero;
 *                 other codes give unspecified values, never undefined behaviour
 * border          outside the image: mirrored, with the pixel of the edge once, each site of a
 *                 mosaic alone
 * accumulator     15 bits, two's complement, of which 15 are needed; cannot overflow;
 *                 -1024 to 15344 at the end, for legal codes
 * requantiser     acc / 2^2, rounded to nearest, ties toward plus infinity, plus the pedestal
 *                 256, held to 0 to 4095
 * output          12-bit unsigned, codes 0 to 4095, 256 stands for zero, one step is 2^-2;
 *                 one for each source pixel; of these rows 0, 2, 4, ... and columns 1, 3, 5,
 *                 ...
 * error           -0.25 to 0.5 LSB of the output code against the ideal filter
 *
 * These bounds hold only for codes inside the declared range of the source. They are
 * engineering evidence, not the work of a qualified tool: verifying the product stays with
 * the engineer who is responsible for it.
 */

/* Element of scratch memory. */
typedef int16_t mosaic_green_word;

/* Elements of scratch that a call needs for a source of that width. A constant expression if
 * width is one; width may be evaluated more than once. */
#define MOSAIC_GREEN_SCRATCH_LEN(width) ((size_t)5 * ((size_t)(width) + 4))

enum mosaic_green_status {
    MOSAIC_GREEN_OK = 0,
    MOSAIC_GREEN_BAD_POINTER, /* src, dst or scratch is null */
    MOSAIC_GREEN_BAD_SIZE,    /* width, height or the range of rows is not legal */
    MOSAIC_GREEN_BAD_STRIDE,  /* a stride is less than a row */
    MOSAIC_GREEN_BAD_SCRATCH, /* scratch_len is too small */
    MOSAIC_GREEN_BAD_CODE     /* never returned by this filter */
};

/* Filter a frame.
 *
 * src          first element of the source; rows start src_stride elements apart
 * dst          first element of the output; rows start dst_stride elements apart
 * width        columns of the source in pixels, 4 to 1280
 * height       rows of the source, 4 to 960
 * scratch      working memory: its contents do not matter before and mean nothing after
 * scratch_len  elements of scratch, at least MOSAIC_GREEN_SCRATCH_LEN(width)
 *
 * src, dst and scratch must not overlap. mosaic_green_output_size tells the size of
 * the output; elements of dst between its rows are left alone. Nothing is written unless the
 * status is MOSAIC_GREEN_OK.
 *
 * Returns an enum mosaic_green_status.
 */
int mosaic_green_frame(
    const uint16_t *MOSAIC_GREEN_RESTRICT src, size_t src_stride,
    uint16_t *MOSAIC_GREEN_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height,
    mosaic_green_word *MOSAIC_GREEN_RESTRICT scratch, size_t scratch_len);

/* Filter output rows `from` to `to` - 1 only: dst is where row `from` goes, src still the
 * first element of the whole frame. Any split of a frame into bands gives the same output.
 *
 * Returns an enum mosaic_green_status.
 */
int mosaic_green_band(
    const uint16_t *MOSAIC_GREEN_RESTRICT src, size_t src_stride,
    uint16_t *MOSAIC_GREEN_RESTRICT dst, size_t dst_stride,
    size_t width, size_t height, size_t from, size_t to,
    mosaic_green_word *MOSAIC_GREEN_RESTRICT scratch, size_t scratch_len);

/* Tell the size of the output, in pixels; both are 0 for a source size that is not legal. */
void mosaic_green_output_size(size_t width, size_t height,
    size_t *out_width, size_t *out_height);

#if defined(__cplusplus)
}
#endif

#endif
