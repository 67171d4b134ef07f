"""The output intent: an sRGB profile built from the standard's numbers, so that its bytes never change.

ICC.1:2001-04 (version 2.4) display profile; primaries, white and curve of IEC 61966-2-1, adapted to D50 as the ICC
asks (linear Bradford). The header's date is fixed.
"""

import struct
from functools import cache

_DESCRIPTION = "sRGB, IEC 61966-2-1, D50 adapted"
_COPYRIGHT = "No copyright, use freely"
_WHITE_D50 = (0.9642, 1.0, 0.8249)
# Columns of the matrix from linear sRGB to XYZ at D50, Bradford adapted, as commonly published to six decimals.
_RED, _GREEN, _BLUE = (0.436066, 0.222488, 0.013916), (0.385147, 0.716873, 0.097076), (0.143066, 0.060608, 0.714096)
_CURVE_POINTS = 1024
_CREATED = (2000, 1, 1, 0, 0, 0)


@cache
def srgb_profile() -> bytes:
    """Return the profile's bytes."""
    curve = _curve()
    tags = {
        b"cprt": _text(),
        b"desc": _description(),
        b"wtpt": _xyz(_WHITE_D50),
        b"rXYZ": _xyz(_RED),
        b"gXYZ": _xyz(_GREEN),
        b"bXYZ": _xyz(_BLUE),
        b"rTRC": curve,
        b"gTRC": curve,
        b"bTRC": curve,
    }
    table, data = _laid_out(tags)
    return _header(128 + len(table) + len(data)) + table + data


def linear(encoded: float) -> float:
    """Return the linear light, 0 to 1, of an encoded sRGB value, 0 to 1 (IEC 61966-2-1)."""
    return encoded / 12.92 if encoded <= 0.04045 else ((encoded + 0.055) / 1.055) ** 2.4


def _header(size: int) -> bytes:
    # An illuminant other than D50 is not allowed here; platform, manufacturer, model, creator and id stay empty.
    return struct.pack(
        ">I4sI4s4s4s6H4s4sI4s4s8sI12s4s44x",
        size, b"", 0x02400000, b"mntr", b"RGB ", b"XYZ ", *_CREATED, b"acsp", b"", 0, b"", b"", b"", 0,
        _numbers(_WHITE_D50), b"",
    )  # fmt: skip


def _laid_out(tags: dict[bytes, bytes]) -> tuple[bytes, bytes]:
    """Return tag table and data; equal data stand once, each on a four-byte edge."""
    offsets: dict[bytes, int] = {}
    table, data = struct.pack(">I", len(tags)), b""
    start = 128 + 4 + 12 * len(tags)
    for name, content in tags.items():
        if content not in offsets:
            offsets[content] = start + len(data)
            data += content + bytes(-len(content) % 4)
        table += struct.pack(">4sII", name, offsets[content], len(content))
    return table, data


def _curve() -> bytes:
    points = [round(65535 * linear(step / (_CURVE_POINTS - 1))) for step in range(_CURVE_POINTS)]
    return struct.pack(f">4s4xI{_CURVE_POINTS}H", b"curv", _CURVE_POINTS, *points)


def _xyz(values: tuple[float, float, float]) -> bytes:
    return b"XYZ \0\0\0\0" + _numbers(values)


def _numbers(values: tuple[float, float, float]) -> bytes:
    return struct.pack(">3i", *(round(value * 65536) for value in values))


def _text() -> bytes:
    return b"text\0\0\0\0" + _COPYRIGHT.encode("ascii") + b"\0"


def _description() -> bytes:
    text = _DESCRIPTION.encode("ascii") + b"\0"
    return b"desc\0\0\0\0" + struct.pack(">I", len(text)) + text + bytes(4 + 4 + 2 + 1 + 67)
