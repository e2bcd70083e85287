/* Soften the fill-level picture, 3x3 binomial. Pointers walk along three rows. */
typedef unsigned char pixel;

#define ROUND_SHIFT(v) (pixel)(((v) + 8) >> 4)

static int clampi(int v, int lo, int hi)
{
    if (v < lo)
        return lo;
    return v > hi ? hi : v;
}

static const pixel *row_of(const pixel *img, int y, int w, int h)
{
    return img + clampi(y, 0, h - 1) * w;
}

void soften(const pixel *img, pixel *out, int w, int h)
{
    int x, y;

    for (y = 0; y < h; y++) {
        const pixel *up = row_of(img, y - 1, w, h);
        const pixel *mid = row_of(img, y, w, h);
        const pixel *down = row_of(img, y + 1, w, h);

        for (x = 0; x < w; x++) {
            int l = x > 0 ? x - 1 : 0;
            int r = x < w - 1 ? x + 1 : x;
            int sum = up[l] + 2 * up[x] + up[r];

            sum += 2 * mid[l] + 4 * mid[x] + 2 * mid[r];
            sum += down[l] + 2 * down[x] + down[r];
            *out++ = ROUND_SHIFT(sum);
        }
    }
}
