"""Photographs turned into what each filter reads, and codes turned into pictures to look at."""

from dataclasses import dataclass
from importlib import import_module

import numpy as np

from guardbit.files.images import image_bytes
from guardbit.model.enums import Grid
from guardbit.model.filter import Filter, PixelFormat
from guardbit.model.routine import Codes


@dataclass(frozen=True, eq=False)
class Photograph:
    """`codes` are 8-bit, (height, width, channels); `credit` says whose it is."""

    name: str
    codes: Codes
    credit: str


@dataclass(frozen=True, eq=False)
class Shot:
    """A frame for one filter, and how it was made of which picture."""

    name: str
    frame: Codes
    made: str


def photographs() -> tuple[Photograph, Photograph]:
    """Return a grey and a colour photograph that scikit-image carries, both CC0.

    Raises ImportError without scikit-image.
    """
    data = import_module("skimage.data")
    grey = np.asarray(data.camera(), np.int64)[:, :, None]
    colour = np.asarray(data.coffee(), np.int64)
    return (
        Photograph("camera", grey, "scikit-image, data.camera: CC0, Lav Varshney"),
        Photograph("coffee", colour, "scikit-image, data.coffee: CC0, Rachel Michetti"),
    )


def shot(f: Filter, grey: Photograph, colour: Photograph) -> Shot:
    """Return a photograph as the filter's camera would have given it.

    Three channels take the colour photograph, a mosaic (site grid) one colour per pixel of
    it, red first; all others the grey one. 0..255 is stretched to the filter's input range.
    """
    if f.geometry.channels == 3:
        return Shot(f.name, _stretched(f.input, colour.codes), _said(f.input, colour))
    if f.border.grid is Grid.SITE:
        said = _said(f.input, colour) + ", one colour per pixel: RG over GB"
        return Shot(f.name, _stretched(f.input, _mosaic(colour.codes)), said)
    return Shot(f.name, _stretched(f.input, grey.codes), _said(f.input, grey))


def _stretched(to: PixelFormat, codes: Codes) -> Codes:
    return to.low + (codes * (to.high - to.low) + 127) // 255


def _said(to: PixelFormat, of: Photograph) -> str:
    as_it_is = (to.low, to.high) == (0, 255)
    return of.name if as_it_is else f"{of.name}, 0..255 stretched to {to.low}..{to.high}"


def _mosaic(codes: Codes) -> Codes:
    plane = codes[:, :, 1:2].copy()
    plane[::2, ::2] = codes[::2, ::2, 0:1]
    plane[1::2, 1::2] = codes[1::2, 1::2, 2:3]
    return plane


def saved(codes: Codes, kind: PixelFormat, name: str) -> tuple[dict[str, bytes], str]:
    """Return files that show the codes and hold them, by name, and what they are.

    A .png of 8-bit codes holds them as they are. Others are scaled to be looked at, and the
    codes themselves are in a .pgm, or in an .npy where they are signed.
    """
    if not kind.signed and kind.high <= 255:
        return {f"{name}.png": image_bytes(codes, 255, f"{name}.png")}, f"{name}.png: the codes"
    exact = f"{name}.npy" if kind.signed else f"{name}.pgm"
    view, scaling = _view(codes, kind)
    files = {
        f"{name}.png": image_bytes(view, 255, f"{name}.png"),
        exact: image_bytes(codes, kind.high, exact),
    }
    return files, f"{name}.png: {scaling}; {exact}: the codes"


def _view(codes: Codes, kind: PixelFormat) -> tuple[Codes, str]:
    if not kind.signed:
        return codes * 255 // kind.high, f"scaled to be seen, {kind.high} is white"
    most = max(1, int(np.abs(codes).max()))
    view = 128 + np.sign(codes) * (np.abs(codes) * 127 // most)
    return view, f"scaled to be seen, 0 is mid-grey, {most} white, -{most} black"
