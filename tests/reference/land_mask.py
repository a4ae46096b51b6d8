"""Makes the half-degree land mask from Natural Earth 1:110m land outlines (public domain).

Usage: land_mask.py COAST OUT   (COAST: lines `longitude latitude`, blank line between closed rings)
A bit is set where the middle of the cell lies inside an odd number of rings; rows from -90, columns from -180.
"""
import gzip
import sys

coast, out = sys.argv[1:3]
rings, ring = [], []
for line in open(coast):
    line = line.strip()
    if line.startswith("#"):
        continue
    if line:
        ring.append(tuple(map(float, line.split())))
    elif ring:
        rings.append(ring)
        ring = []
if ring:
    rings.append(ring)
columns, rows = 720, 360
bits = bytearray(columns * rows // 8)
for row in range(rows):
    latitude = -90 + (row + 0.5) / 2
    crossings = []
    for ring in rings:
        for (x1, y1), (x2, y2) in zip(ring, ring[1:] + ring[:1]):
            if (y1 > latitude) != (y2 > latitude):
                crossings.append(x1 + (latitude - y1) * (x2 - x1) / (y2 - y1))
    for column in range(columns):
        longitude = -180 + (column + 0.5) / 2
        if sum(crossing > longitude for crossing in crossings) % 2:
            at = row * columns + column
            bits[at // 8] |= 0x80 >> (at % 8)
with gzip.GzipFile(out, "wb", 9, mtime=0) as file:
    file.write(bytes(bits))
print(sum(bin(byte).count("1") for byte in bits) / (columns * rows))
