"""Packs coastlines for the chart: quantised to 0.01 degree, differences as variable-length integers, gzip.

Input: text of `lon lat` lines in degrees, polylines separated by blank lines, as made of the Natural Earth land
boundaries (public domain, release of npm world-atlas 2.0.2: land-110m.json, land-50m.json).
Usage: python coastlines.py INPUT.txt OUTPUT.gz

Format of the expanded bytes: for each polyline the number of points, then for each point the differences of longitude
and latitude, in hundredths of a degree, from the point before (the first: from 0, 0). Numbers are unsigned LEB128;
signed ones are folded as (n << 1) ^ (n >> 63). Edges that only close a polygon, along the date line or at the south
pole, are left out. Standard library only.
"""

import gzip
import sys


def leb128(number):
    out = bytearray()
    while True:
        byte = number & 0x7F
        number >>= 7
        if number:
            out.append(byte | 0x80)
        else:
            out.append(byte)
            return bytes(out)


def folded(number):
    return leb128((number << 1) ^ (number >> 63))


def polylines(path):
    line = []
    for text in open(path, encoding="ascii"):
        if text.startswith("#"):
            continue
        if not text.strip():
            if line:
                yield line
            line = []
            continue
        lon, lat = (round(float(x) * 100) for x in text.split())
        line.append((lon, lat))
    if line:
        yield line


def artificial(a, b):
    on_date_line = abs(a[0]) >= 17999 and abs(b[0]) >= 17999
    at_pole = a[1] <= -8990 or b[1] <= -8990
    return on_date_line or at_pole


def pieces(line):
    piece = [line[0]]
    for a, b in zip(line, line[1:]):
        if a == b:
            continue
        if artificial(a, b):
            yield piece
            piece = [b]
        else:
            piece.append(b)
    yield piece


def main():
    out = bytearray()
    for line in polylines(sys.argv[1]):
        for piece in pieces(line):
            if len(piece) < 2:
                continue
            out += leb128(len(piece))
            lon, lat = 0, 0
            for x, y in piece:
                out += folded(x - lon) + folded(y - lat)
                lon, lat = x, y
    with open(sys.argv[2], "wb") as file:
        file.write(gzip.compress(bytes(out), 9, mtime=0))
    print(len(out), "bytes expanded")


main()
