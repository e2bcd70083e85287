"""Makes the examples' data: a raw frame of a bottle's shoulder and a measured defocus.

Both are invented. Only additions, multiplications, divisions and square roots are used, which
IEEE 754 rounds alike on every machine, so the files come out the same byte for byte.

    python examples/make_data.py [FOLDER]      (default: examples/data)
"""

import sys
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

Plane = NDArray[np.float64]

HEIGHT, WIDTH = 64, 96
BLACK, LEAST, GREATEST = 256, 64, 4032

PSF_SIZE = 7
PSF_RADIUS = 2.4


def main(arguments: list[str]) -> int:
    """Write the files into the folder that the arguments name and return 0."""
    folder = Path(arguments[0]) if arguments else Path(__file__).parent / "data"
    folder.mkdir(parents=True, exist_ok=True)
    for name, data in files().items():
        (folder / name).write_bytes(data)
        print(folder / name)
    return 0


def files() -> dict[str, bytes]:
    """Return the bytes of every data file, by name."""
    return {"label_psf.csv": psf_csv(psf()), "shoulder.pgm": pgm(shoulder(), 4095)}


def psf() -> NDArray[np.int64]:
    """Return the defocus as counts, (7, 7), brightest 1000.

    At (dy, dx) from the centre, r = sqrt(dy^2 + dx^2) pixels away, a lens out of focus by a
    disc of radius 2.4 gives clip(2.9 - r, 0, 1): a disc whose edge falls off over one pixel.
    The lens is tilted, which makes one side brighter: times 1 + 0.05 dx - 0.02 dy. Counts are
    scaled to the brightest and rounded to the nearest.
    """
    at = np.arange(PSF_SIZE, dtype=np.float64) - PSF_SIZE // 2
    dy, dx = at[:, None], at[None, :]
    disc = np.clip(PSF_RADIUS + 0.5 - np.sqrt(dy * dy + dx * dx), 0.0, 1.0)
    light = disc * (1.0 + 0.05 * dx - 0.02 * dy)
    counts: NDArray[np.int64] = np.floor(1000.0 * light / light.max() + 0.5).astype(np.int64)
    return counts


def psf_csv(counts: NDArray[np.int64]) -> bytes:
    """Return counts as a table with a comment that says what they are."""
    head = (
        "# Defocus of the label camera: counts of a point of light, brightest pixel 1000.\n"
        "# Invented data, written by examples/make_data.py, which states the formula.\n"
    )
    rows = (",".join(str(count) for count in row) for row in counts.tolist())
    return (head + "\n".join(rows) + "\n").encode("ascii")


def shoulder() -> NDArray[np.int64]:
    """Return a 12-bit raw frame, (64, 96): a bottle's shoulder and label before a lamp.

    Codes stand above the black level of 256 and inside the sensor's 64..4032.
    """
    y, x = np.meshgrid(np.arange(HEIGHT) * 1.0, np.arange(WIDTH) * 1.0, indexing="ij")
    light = lamp(y, x) * glass(y, x) * label(y, x)
    codes = BLACK + np.floor(light + noise(y, x, light) + 0.5).astype(np.int64)
    return np.clip(codes, LEAST, GREATEST)


def lamp(y: Plane, x: Plane) -> Plane:
    """Return the lamp's light: brightest left of the middle, falling off as a parabola."""
    u, v = (x - 40.0) / WIDTH, (y - 30.0) / HEIGHT
    return 3300.0 * (1.0 - 0.5 * u * u - 0.3 * v * v)


def half_width(y: Plane) -> Plane:
    """Return half the bottle's width at a row: neck, shoulder as part of a circle, body."""
    down = np.clip((y - 14.0) / 26.0, 0.0, 1.0)
    return 11.0 + 25.0 * np.sqrt(1.0 - (1.0 - down) * (1.0 - down))


def glass(y: Plane, x: Plane) -> Plane:
    """Return what the bottle lets through: less where light crosses its wall aslant."""
    across = np.abs(x - 48.0) / half_width(y)
    inside = np.sqrt(np.clip(1.0 - across * across, 0.0, 1.0))
    liquid = np.where(y > 24.0, 0.6, 0.9)
    return np.where(across < 1.0, 0.15 + 0.85 * inside * liquid, 1.0)


def label(y: Plane, x: Plane) -> Plane:
    """Return what the label lets through: paper on the body, with bars of print."""
    paper = (y >= 46.0) & (np.abs(x - 48.0) < 30.0)
    print_ = paper & (y >= 50.0) & (y < 60.0) & ((x * 7.0 % 12.0) < 5.0)
    return np.where(print_, 0.05, np.where(paper, 0.35, 1.0))


def noise(y: Plane, x: Plane, light: Plane) -> Plane:
    """Return noise that grows as the root of the light, from an integer hash of the place.

    The hash is Knuth's multiplicative one (2654435761 modulo 2^32), twice.
    """
    number = (y * WIDTH + x).astype(np.uint64) + np.uint64(1)
    for _ in range(2):
        number = number * np.uint64(2654435761) % np.uint64(2**32)
        number ^= number >> np.uint64(15)
    uniform = number.astype(np.float64) / 2.0**32 - 0.5
    return uniform * (12.0 + np.sqrt(light))


def pgm(codes: NDArray[np.int64], maxval: int) -> bytes:
    """Return a raw grey map (pgm(5) of Netpbm), two bytes a code, the greater one first."""
    height, width = codes.shape
    return f"P5\n{width} {height}\n{maxval}\n".encode("ascii") + codes.astype(">u2").tobytes()


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
