/* Wrong: the mirror about the last pixel is one off, where the picture is as short as the taps'
 * reach. Frames of a usual size do not show it. */
#include <stdint.h>

static int fold(int i, int n)
{
    if (n == 1)
        return 0;
    if (i < 0)
        i = -i;
    if (i >= n)
        i = 2 * (n - 1) - i;
    return i < 0 ? 0 : i;
}

void lowpass(const uint8_t *src, uint8_t *dst, int width, int height)
{
    static const int tap[] = { 1, 4, 6, 4, 1 };
    int y, x, k;

    for (y = 0; y < height; y++)
        for (x = 0; x < width; x++) {
            int sum = 8;

            for (k = 0; k < 5; k++)
                sum += tap[k] * src[y * width + fold(x + k - 2, width)];
            dst[y * width + x] = (uint8_t)(sum >> 4);
        }
}
