"""PNG bytes of a page, written for speed: level 1 and no search for the best filter."""

from __future__ import annotations

import struct
import zlib

import numpy as np
from numpy.typing import NDArray

_SIGNATURE = b"\x89PNG\r\n\x1a\n"
# The picture goes through a socket once and is thrown away.
_LEVEL = 1
_BITS, _RGBA = 8, 6
_PER_METRE, _METRE = 1 / 0.0254, 1


def encode(pixels: NDArray[np.uint8], dpi: float) -> bytes:
    """Return an image as PNG.

    Parameters
    ----------
    pixels : ndarray of uint8, shape (height, width, 4)
        Red, green, blue and opacity, not multiplied with each other.
    dpi : float
        Pixels per inch, noted in the file.

    Returns
    -------
    bytes

    References
    ----------
    ISO/IEC 15948, Portable Network Graphics.
    """
    height, width, _ = pixels.shape
    # Each line is led by a byte that names its filter; 0 is none.
    lines = np.zeros((height, 1 + 4 * width), dtype=np.uint8)
    lines[:, 1:] = pixels.reshape(height, 4 * width)
    packer = zlib.compressobj(_LEVEL, zlib.DEFLATED, zlib.MAX_WBITS, zlib.DEF_MEM_LEVEL + 1)
    data = packer.compress(lines.data) + packer.flush()
    header = struct.pack(">IIBBBBB", width, height, _BITS, _RGBA, 0, 0, 0)
    density = round(dpi * _PER_METRE)
    return b"".join([
        _SIGNATURE,
        _chunk(b"IHDR", header),
        _chunk(b"pHYs", struct.pack(">IIB", density, density, _METRE)),
        _chunk(b"IDAT", data),
        _chunk(b"IEND", b""),
    ])  # fmt: skip


def _chunk(kind: bytes, data: bytes) -> bytes:
    return struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data))
