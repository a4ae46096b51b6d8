"""Makes the embedded BUFR tables from the files of Debian package libeccodes-data 2.28.0 (Apache-2.0).

Usage: bufr_tables.py FOLDER OUT   (FOLDER holds bufr/tables/0 of the package; OUT is src/wire/bufr/data)
The newest master version serves; rows that differed in older versions are kept beside it with the last
version they were valid in, and so are the local rows of the two centres whose messages are in the tests.
"""
import gzip
import os
import re
import sys

folder, out = sys.argv[1:3]
CENTRES = (78, 98)


def rows(path):
    found = {}
    if os.path.exists(path):
        for line in open(path, encoding="latin1"):
            if not line.startswith("#") and line.strip():
                cells = line.rstrip("\n").split("|")
                if re.fullmatch(r"\d{6}", cells[0]):
                    found[cells[0]] = "|".join(cells[:8]).encode("ascii", "replace").decode()
    return found


def sequences(path):
    found = {}
    if os.path.exists(path):
        text = open(path, encoding="latin1").read()
        for match in re.finditer(r'"(\d{6})"\s*=\s*\[([^\]]*)\]', text):
            found[match.group(1)] = " ".join(re.findall(r"\d{6}", match.group(2)))
    return found


def history(tables, key):
    """The newest rows, and older ones that differ with the last version they stood in."""
    newest, older = {}, []
    for version in sorted(tables):
        for code, row in tables[version].items():
            before = newest.get(code)
            if before is not None and key(before[1]) != key(row):
                older.append((code, before[0], before[1]))
            newest[code] = (version, row)
    return {code: row for code, (_, row) in newest.items()}, sorted(older)


def write(name, lines):
    with gzip.GzipFile(os.path.join(out, name), "wb", 9, mtime=0) as file:
        file.write(("\n".join(lines) + "\n").encode())


def layout(row):
    return row.split("|")[5:8]


base = os.path.join(folder, "wmo")
versions = sorted(int(v) for v in os.listdir(base) if v.isdigit())
newest, older = history({v: rows(f"{base}/{v}/element.table") for v in versions}, layout)
write("table_b.txt.gz", [newest[code] for code in sorted(newest)])
write("table_b_older.txt.gz", [f"{last}|{row}" for _, last, row in older])
newest, older = history({v: sequences(f"{base}/{v}/sequence.def") for v in versions}, str)
write("table_d.txt.gz", [f"{code} {newest[code]}" for code in sorted(newest)])
write("table_d_older.txt.gz", [f"{last} {code} {row}" for code, last, row in older])
lines_b, lines_d = [], []
for centre in CENTRES:
    base = os.path.join(folder, "local")
    versions = sorted(int(v) for v in os.listdir(base) if v.isdigit())
    paths = {v: f"{base}/{v}/{centre}/0" for v in versions}
    newest, older = history({v: rows(f"{p}/element.table") for v, p in paths.items()}, layout)
    lines_b += [f"{centre}|{last}|{row}" for _, last, row in older]
    lines_b += [f"{centre}|255|{newest[code]}" for code in sorted(newest)]
    newest, older = history({v: sequences(f"{p}/sequence.def") for v, p in paths.items()}, str)
    lines_d += [f"{centre} {last} {code} {row}" for code, last, row in older]
    lines_d += [f"{centre} 255 {code} {newest[code]}" for code in sorted(newest)]
write("local_b.txt.gz", lines_b)
write("local_d.txt.gz", lines_d)
