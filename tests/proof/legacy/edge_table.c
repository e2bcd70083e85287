/* Neck edges: gradient with black outside. The mask is a table, pixels come through a macro. */
#include <stdint.h>

#define PIX(y, x) ((y) < 0 || (y) >= h || (x) < 0 || (x) >= w ? 0 : in[(y) * pitch + (x)])

static const signed char mask[3][3] = {
    { 1, 0, -1 },
    { 2, 0, -2 },
    { 1, 0, -1 },
};

int edge(const uint8_t *in, long pitch, int16_t *out, long out_pitch, int w, int h)
{
    int y, x, j, i;

    for (y = 0; y < h; y++) {
        for (x = 0; x < w; x++) {
            int acc = 0;

            for (j = -1; j <= 1; j++)
                for (i = -1; i <= 1; i++)
                    acc += mask[j + 1][i + 1] * PIX(y - j, x - i);
            out[y * out_pitch + x] = (int16_t)acc;
        }
    }
    return 0;
}
