/* Runs a list of calls of emitted filters in buffers exactly as long as the calls say, and
 * compares status, output and the bytes between output rows with what is expected. Bands are
 * run as well as frames. Prints the first difference of each call; the exit status is 1 if
 * there was any. */

#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#ifndef BENCH_INT
#define BENCH_INT int
#define BENCH_SIZE size_t
#endif

BENCH_INT bench_band(BENCH_INT which, const void *src, BENCH_SIZE src_stride, void *dst,
    BENCH_SIZE dst_stride, BENCH_SIZE width, BENCH_SIZE height, BENCH_SIZE from, BENCH_SIZE to,
    void *scratch, BENCH_SIZE scratch_len);
BENCH_INT bench_frame(BENCH_INT which, const void *src, BENCH_SIZE src_stride, void *dst,
    BENCH_SIZE dst_stride, BENCH_SIZE width, BENCH_SIZE height, void *scratch,
    BENCH_SIZE scratch_len);
void bench_size(BENCH_INT which, BENCH_SIZE width, BENCH_SIZE height, BENCH_SIZE *out_width,
    BENCH_SIZE *out_height);

enum { OK = 0, BAD_SCRATCH = 4, FILL = 0xA5 };

struct record {
    int64_t which, width, height, row, size, out_width, out_height, out_row, out_size;
    int64_t scratch_len, scratch_size, gap, split, status, free_values;
};

static void *get(size_t bytes)
{
    void *made = malloc(bytes);

    if (made == NULL || fread(made, 1, bytes, stdin) != bytes) {
        fputs("the job is too short\n", stderr);
        exit(2);
    }
    return made;
}

/* A block with `gap` elements between rows, and none behind the last. */
static size_t block(int64_t rows, int64_t row, int64_t gap, int64_t size)
{
    return rows > 0 ? (size_t)(((rows - 1) * (row + gap) + row) * size) : 0;
}

static unsigned char *spread(const struct record *r, const unsigned char *packed)
{
    unsigned char *made = malloc(block(r->height, r->row, r->gap, r->size));
    int64_t y;

    for (y = 0; y < r->height; y++) {
        unsigned char *to = made + y * (r->row + r->gap) * r->size;

        if (y > 0) {
            memset(to - r->gap * r->size, FILL, (size_t)(r->gap * r->size));
        }
        memcpy(to, packed + y * r->row * r->size, (size_t)(r->row * r->size));
    }
    return made;
}

static int differs(const struct record *r, const char *what, const unsigned char *dst,
    const unsigned char *wanted)
{
    const size_t row = (size_t)(r->out_row * r->out_size);
    const size_t gap = (size_t)(r->gap * r->out_size);
    int64_t y;
    size_t i;

    for (y = 0; y < r->out_height; y++) {
        const unsigned char *line = dst + (size_t)y * (row + gap);

        for (i = 0; i < (y + 1 < r->out_height ? row + gap : row); i++) {
            const int untouched = i >= row || r->status != OK;

            if (r->free_values && !untouched) {
                continue;
            }
            if (line[i] != (untouched ? FILL : wanted[(size_t)y * row + i])) {
                printf("%d %s %dx%d: byte %d of row %d differs\n", (int)r->which, what,
                    (int)r->height, (int)r->width, (int)i, (int)y);
                return 1;
            }
        }
    }
    return 0;
}

static int run(const struct record *r, const unsigned char *packed, const unsigned char *wanted)
{
    const size_t bytes = block(r->out_height, r->out_row, r->gap, r->out_size);
    unsigned char *const src = spread(r, packed);
    unsigned char *const dst = malloc(bytes + (bytes == 0));
    void *const scratch = malloc((size_t)(r->scratch_len * r->scratch_size));
    const BENCH_SIZE stride = (BENCH_SIZE)(r->row + r->gap);
    const BENCH_SIZE out_stride = (BENCH_SIZE)(r->out_row + r->gap);
    const BENCH_SIZE width = (BENCH_SIZE)r->width, height = (BENCH_SIZE)r->height;
    const BENCH_SIZE len = (BENCH_SIZE)r->scratch_len;
    BENCH_SIZE out_width = 77, out_height = 77;
    BENCH_INT status;
    int failures = 0;

    bench_size((BENCH_INT)r->which, width, height, &out_width, &out_height);
    if ((int64_t)out_width != r->out_width || (int64_t)out_height != r->out_height) {
        printf("%d %dx%d: output %dx%d\n", (int)r->which, (int)height, (int)width,
            (int)out_height, (int)out_width);
        failures++;
    }
    memset(dst, FILL, bytes);
    memset(scratch, 0x5A, (size_t)(r->scratch_len * r->scratch_size));
    status = bench_frame((BENCH_INT)r->which, src, stride, dst, out_stride, width, height, scratch,
        len);
    if (status != r->status) {
        printf("%d %dx%d: status %d\n", (int)r->which, (int)height, (int)width, (int)status);
        failures++;
    }
    failures += differs(r, "frame", dst, wanted);
    if (r->status == OK) {
        const BENCH_SIZE split = (BENCH_SIZE)r->split, end = (BENCH_SIZE)r->out_height;

        memset(dst, FILL, bytes);
        status = bench_band((BENCH_INT)r->which, src, stride,
            dst + block(r->split + 1, 0, r->out_row + r->gap, r->out_size), out_stride, width,
            height, split, end, scratch, len);
        status |= bench_band((BENCH_INT)r->which, src, stride, dst, out_stride, width, height, 0,
            split, scratch, len);
        if (status != OK) {
            printf("%d bands: status %d\n", (int)r->which, (int)status);
            failures++;
        }
        failures += differs(r, "bands", dst, wanted);
        status = bench_frame((BENCH_INT)r->which, src, stride, dst, out_stride, width, height,
            scratch, (BENCH_SIZE)(len - 1));
        if (status != (r->out_row == 0 || r->out_height == 0 ? OK : BAD_SCRATCH)) {
            printf("%d: status %d with too little scratch\n", (int)r->which, (int)status);
            failures++;
        }
    }
    free(scratch);
    free(dst);
    free(src);
    return failures;
}

int main(void)
{
    struct record r;
    int failures = 0;

    while (fread(&r, sizeof r, 1, stdin) == 1) {
        unsigned char *packed = get((size_t)(r.height * r.row * r.size));
        unsigned char *wanted = get((size_t)(r.out_height * r.out_row * r.out_size));

        failures += run(&r, packed, wanted);
        free(wanted);
        free(packed);
    }
    return failures != 0;
}
