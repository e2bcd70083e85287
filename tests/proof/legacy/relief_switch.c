/* Relief of the cap rim about mid grey. The edge of the picture is told apart by a switch. */
enum side { INSIDE, LOW, HIGH, BOTH };

static enum side side_of(int i, int n)
{
    if (n == 1)
        return BOTH;
    if (i == 0)
        return LOW;
    return i == n - 1 ? HIGH : INSIDE;
}

static int step_back(enum side s)
{
    switch (s) {
    case LOW:
    case BOTH:
        return 0;
    case INSIDE:
    case HIGH:
        break;
    }
    return -1;
}

static int step_on(enum side s)
{
    switch (s) {
    case HIGH:
    case BOTH:
        return 0;
    default:
        return 1;
    }
}

void relief(unsigned char *to, const unsigned char *from, unsigned w, unsigned h)
{
    unsigned x, y;

    for (y = 0; y < h; y++)
        for (x = 0; x < w; x++) {
            enum side sx = side_of((int)x, (int)w), sy = side_of((int)y, (int)h);
            const unsigned char *p = from + y * w + x;
            int up = step_back(sy) * (int)w, down = step_on(sy) * (int)w;
            int left = step_back(sx), right = step_on(sx);
            int v = 3 * p[up + left] + p[up] - p[down] - 3 * p[down + right];

            v = v / 4 + 128; /* C rounds toward zero, and so does the contract */
            if (v < 0)
                v = 0;
            if (v > 255)
                v = 255;
            to[y * w + x] = (unsigned char)v;
        }
}
