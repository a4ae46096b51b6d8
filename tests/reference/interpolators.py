"""Reference interpolators on the very reports that the analysis is tested with.

Makes the report sets of tests/data/analysis_*.csv.gz and the results of general-purpose
interpolators on them, tests/data/analysis_reference.csv.

Needs: Python 3.11, numpy 1.26 to 2.x, scipy 1.11 or later (versions used are written to the result).
Usage: interpolators.py DATA_FOLDER TESTS_DATA_FOLDER
DATA_FOLDER holds grids/jan1996_part1_*.txt, map/coast110.txt and truth/*.csv.gz.
"""

import csv
import gzip
import io
import math
import sys
from pathlib import Path

import numpy as np
import scipy
from scipy.interpolate import RBFInterpolator, RectBivariateSpline

DATA, OUT = Path(sys.argv[1]), Path(sys.argv[2])
R_KM = 6371.0088


def unit(lat, lon):
    lat, lon = np.radians(lat), np.radians(lon)
    return np.stack([np.cos(lat) * np.cos(lon), np.cos(lat) * np.sin(lon), np.sin(lat)], -1)


def thin_plate(lat, lon, p, at_lat, at_lon, smoothing=0.0):
    """Thin-plate spline through the 50 nearest, in km on an azimuthal map about the mean place."""
    def plane(la, lo):
        x = unit(la, lo)
        c = unit(np.mean(lat), np.mean(lon))
        east = np.array([-math.sin(math.radians(np.mean(lon))), math.cos(math.radians(np.mean(lon))), 0.0])
        north = np.cross(c, east)
        k = R_KM * np.sqrt(2.0 / (1.0 + x @ c))
        return np.stack([k * (x @ east), k * (x @ north)], -1) / 1000.0
    n = min(50, len(p))
    xy, index = np.unique(plane(lat, lon), axis=0, return_index=True)
    f = RBFInterpolator(xy, np.asarray(p)[index], neighbors=n if len(index) > n else None,
                        kernel="thin_plate_spline", smoothing=smoothing)
    return f(plane(at_lat, at_lon))


def land_mask():
    lines, line = [], []
    for text in (DATA / "map/coast110.txt").read_text().splitlines():
        if text.startswith("#"):
            continue
        if text.strip():
            line.append([float(v) for v in text.split()[:2]])
        elif line:
            lines.append(np.array(line))
            line = []
    if line:
        lines.append(np.array(line))

    def is_land(lat, lon):
        inside = False
        for ring in lines:
            x0, y0, x1, y1 = ring[:-1, 0], ring[:-1, 1], ring[1:, 0], ring[1:, 1]
            crosses = (x0 > lon) != (x1 > lon)
            if crosses.any():
                y = y0[crosses] + (lon - x0[crosses]) / (x1[crosses] - x0[crosses]) * (y1[crosses] - y0[crosses])
                inside ^= bool((y > lat).sum() % 2)
        return inside

    return is_land


def fields(name):
    times, values, grid = [], [], []
    for text in (DATA / f"grids/jan1996_part1_{name}.txt").read_text().splitlines():
        if text.startswith("#"):
            continue
        head, *rest = text.split()
        if head == "lat":
            lats = np.array([float(v) for v in rest])
        elif head == "lon":
            lons = np.array([float(v) for v in rest])
        elif head == "field":
            times.append(rest[0])
            values.append([])
        else:
            values[-1].append([float(v) for v in text.split()])
    return lats, lons, dict(zip(times, [np.array(v) for v in values]))


def january(rows, results):
    lats, lons, p = fields("p_msl_hPa")
    _, _, u = fields("u_ms")
    _, _, v = fields("v_ms")
    is_land = land_mask()
    rng = np.random.default_rng(1996)
    for hour in ["1996-01-07T06:00Z", "1996-01-07T18:00Z", "1996-01-08T06:00Z", "1996-01-08T18:00Z"]:
        good = np.isfinite(p[hour])
        # Splines need a full field; places whose cell touches a gap are not sampled.
        full = {}
        for name, field in (("p", p[hour]), ("u", u[hour]), ("v", v[hour])):
            filled = field.copy()
            for row in filled:
                ok = np.isfinite(row)
                row[~ok] = np.interp(np.where(~ok)[0], np.where(ok)[0], row[ok])
            full[name] = RectBivariateSpline(lats, lons, filled, kx=3, ky=3)
        truth = [(lats[j], lons[i], p[hour][j, i], is_land(lats[j], lons[i]))
                 for j in range(len(lats)) for i in range(len(lons)) if good[j, i]]
        for count in (100, 300, 1000):
            made = []
            while len(made) < count:
                lat, lon = rng.uniform(20, 60), rng.uniform(-140, -52.5)
                # Even over the sphere.
                if rng.uniform(0, math.cos(math.radians(20))) > math.cos(math.radians(lat)):
                    continue
                j = int(np.clip(np.searchsorted(lats, lat) - 1, 0, len(lats) - 2))
                i = int(np.clip(np.searchsorted(lons, lon) - 1, 0, len(lons) - 2))
                if not good[j:j + 2, i:i + 2].all():
                    continue
                land = is_land(lat, lon)
                error = 0.5 if land else 1.0
                values = {k: float(f(lat, lon)[0, 0]) for k, f in full.items()}
                made.append((lat, lon, land, values["p"] + rng.normal(0, error),
                             values["u"] + rng.normal(0, 1.5), values["v"] + rng.normal(0, 1.5)))
            for lat, lon, land, pp, uu, vv in made:
                rows.append([hour, count, f"{lat:.3f}", f"{lon:.3f}", int(land), f"{pp:.2f}", f"{uu:.2f}", f"{vv:.2f}"])
            a = np.array([[m[0], m[1], m[3]] for m in made])
            t = np.array([[x[0], x[1], x[2], x[3]] for x in truth], float)
            sea = t[:, 3] == 0
            for smoothing in (0.0, 0.0001, 0.001, 0.01):
                found = thin_plate(a[:, 0], a[:, 1], a[:, 2], t[:, 0], t[:, 1], smoothing)
                e = found - t[:, 2]
                rms = lambda x: math.sqrt(float(np.mean(x * x)))
                results.append(["january", hour, count, f"thin plate, 50 neighbours, smoothing {smoothing:g}",
                                f"{rms(e):.4f}", f"{rms(e[sea]):.4f}"])
    return


def write(name, header, rows):
    buffer = io.BytesIO()
    with gzip.GzipFile(fileobj=buffer, mode="wb", mtime=0) as file:
        text = io.TextIOWrapper(file, newline="")
        csv.writer(text, lineterminator="\n").writerows([header] + rows)
        text.flush()
    (OUT / name).write_bytes(buffer.getvalue())


def main():
    rows, results = [], []
    january(rows, results)
    write("analysis_january_1996.csv.gz",
          ["hour", "count", "latitude_deg", "longitude_deg", "land", "pressure_hpa", "u_m_s", "v_m_s"], rows)
    lats, lons, p = fields("p_msl_hPa")
    is_land = land_mask()
    write("analysis_january_1996_truth.csv.gz", ["hour", "latitude_deg", "longitude_deg", "sea", "pressure_hpa"],
          [[hour, lats[j], lons[i], int(not is_land(lats[j], lons[i])), f"{p[hour][j, i]:.2f}"]
           for hour in ["1996-01-07T06:00Z", "1996-01-07T18:00Z", "1996-01-08T06:00Z", "1996-01-08T18:00Z"]
           for j in range(len(lats)) for i in range(len(lons)) if np.isfinite(p[hour][j, i])])
    with (OUT / "analysis_reference.csv").open("w", newline="") as file:
        out = csv.writer(file, lineterminator="\n")
        out.writerow([f"# scipy {scipy.__version__}, numpy {np.__version__}; RMSE in hPa"])
        out.writerow(["case", "hour", "count", "method", "rmse_hpa", "rmse_sea_hpa"])
        out.writerows(results)


main()
