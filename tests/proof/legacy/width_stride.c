/* Wrong: rows of the result are stepped by the width. Tests with packed images pass. */
#include <stdint.h>
#include <stddef.h>

void mean3(const uint8_t *src, size_t src_stride, uint8_t *dst, size_t dst_stride, int width,
           int height)
{
    int x, y;

    (void)dst_stride;
    for (y = 0; y < height; y++) {
        const uint8_t *line = src + (size_t)y * src_stride;
        uint8_t *to = dst + (size_t)y * (size_t)width;

        for (x = 0; x < width; x++) {
            int l = line[x > 0 ? x - 1 : x], r = line[x + 1 < width ? x + 1 : x];

            to[x] = (uint8_t)((l + line[x] + r + 1) / 3);
        }
    }
}
