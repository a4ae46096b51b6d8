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
import zlib
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
            for smoothing in SMOOTHINGS:
                found = thin_plate(a[:, 0], a[:, 1], a[:, 2], t[:, 0], t[:, 1], smoothing)
                e = found - t[:, 2]
                rms = lambda x: math.sqrt(float(np.mean(x * x)))
                results.append(["january", hour, count, f"thin plate, 50 neighbours, smoothing {smoothing:g}",
                                f"{rms(e):.4f}", f"{rms(e[sea]):.4f}"])
    return


SMOOTHINGS = (0.0, 0.0001, 0.001, 0.01, 0.1)


def gross(rows):
    """Rows (latitude, longitude, pressure) that are more than 8 hPa from the median of their 6 nearest."""
    x = unit(np.array([r[0] for r in rows]), np.array([r[1] for r in rows]))
    p = np.array([r[2] for r in rows])
    out = []
    for k in range(len(rows)):
        near = np.argsort(-(x @ x[k]))[1:7]
        out.append(abs(p[k] - np.median(p[near])) > 8.0)
    return out


def withheld(case, hour, rows, held, used, results):
    """rows: (latitude, longitude, pressure); gross ones are kept from the reference altogether."""
    a = np.array([r for r, u in zip(rows, used) if u])
    t = np.array([r for r, h in zip(rows, held) if h])
    for smoothing in SMOOTHINGS:
        e = thin_plate(a[:, 0], a[:, 1], a[:, 2], t[:, 0], t[:, 1], smoothing) - t[:, 2]
        r = math.sqrt(float(np.mean(e * e)))
        results.append([case, hour, len(a), f"thin plate, 50 neighbours, smoothing {smoothing:g}", f"{r:.4f}", ""])


def world(rows, results):
    """2018-11-02 12Z, one in ten stations withheld, five folds, three regions."""
    regions = {"rich": (36, 62, -12, 32), "middling": (20, 60, 60, 140), "poor": (-60, -5, -82, -30)}
    seen = {}
    with gzip.open(DATA / "truth/perf_synop.csv.gz", "rt") as file:
        for row in csv.DictReader(file):
            try:
                lat, lon, high = float(row["latitude"]), float(row["longitude"]), float(row["heightOfStation"])
                p = float(row["pressureReducedToMeanSeaLevel"]) / 100.0
            except ValueError:
                continue
            if not (870 < p < 1085 and high < 1000 and abs(lat) <= 90):
                continue
            station = f"{int(row['blockNumber']):02d}{int(row['stationNumber']):03d}"
            try:
                d, f = math.radians(float(row["windDirectionAt10M"])), float(row["windSpeedAt10M"])
                wind = (-f * math.sin(d), -f * math.cos(d)) if f < 60 else None
            except ValueError:
                wind = None
            seen.setdefault(station, (lat, lon, p, high, wind))
    for name, (south, north, west, east) in regions.items():
        chosen = {k: v for k, v in sorted(seen.items()) if south <= v[0] <= north and west <= v[1] <= east}
        bad = gross(list(chosen.values()))
        for (station, (lat, lon, p, high, wind)), wrong in zip(chosen.items(), bad):
            rows.append([name, "2018-11-02T12:00Z", station, lat, lon, high, f"{p:.1f}",
                         f"{wind[0]:.2f}" if wind else "", f"{wind[1]:.2f}" if wind else "",
                         zlib.crc32(station.encode()) % 100, int(wrong)])
        for fold in range(5):
            held = [zlib.crc32(k.encode()) % 10 == fold and not w for k, w in zip(chosen, bad)]
            used = [zlib.crc32(k.encode()) % 10 != fold and not w for k, w in zip(chosen, bad)]
            withheld(name, f"fold {fold}", [v[:3] for v in chosen.values()], held, used, results)


def hourly(rows, results):
    """18 March 1995, North America, four hours, of which the last is judged."""
    hours = {h: {} for h in (15, 16, 17, 18)}
    with gzip.open(DATA / "truth/hourly_stations_19950318.csv.gz", "rt") as file:
        for row in csv.DictReader(file):
            if row["a_0200"] == "5" or not row["PSL_hPa"] or "1995 03 18" not in row["time"]:
                continue
            try:
                lat, lon, p, high = (float(row[k]) for k in ("lat", "lon", "PSL_hPa", "elev_m"))
            except ValueError:
                continue
            clock = row["time"].split()[3]
            minute = int(clock[:2]) * 60 + int(clock[3:5])
            hour = (minute + 30) // 60
            if hour not in hours or not (870 < p < 1085 and high < 1000 and 20 < lat < 65 and -140 < lon < -50):
                continue
            wind = None
            if row["DIR"] and row["SPD_ms"]:
                d, f = math.radians(float(row["DIR"])), float(row["SPD_ms"])
                wind = (-f * math.sin(d), -f * math.cos(d))
            hours[hour].setdefault(row["id"], (lat, lon, p, high, wind, minute))
    for hour, stations in hours.items():
        chosen = dict(sorted(stations.items()))
        bad = gross(list(chosen.values()))
        for (station, (lat, lon, p, high, wind, minute)), wrong in zip(chosen.items(), bad):
            rows.append(["hourly", f"1995-03-18T{minute // 60:02d}:{minute % 60:02d}Z", station, lat, lon, high,
                         f"{p:.1f}", f"{wind[0]:.2f}" if wind else "", f"{wind[1]:.2f}" if wind else "",
                         zlib.crc32(station.encode()) % 100, int(wrong)])
        if hour == 18:
            part = [zlib.crc32(k.encode()) % 100 for k in chosen]
            for name, take in (("all", lambda c: c % 10 != 0), ("sparse", lambda c: c % 10 != 0 and c < 14)):
                held = [c % 10 == 0 and not w for c, w in zip(part, bad)]
                used = [take(c) and not w for c, w in zip(part, bad)]
                withheld("hourly", name, [v[:3] for v in chosen.values()], held, used, results)


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
    stations = []
    world(stations, results)
    hourly(stations, results)
    write("analysis_stations.csv.gz",
          ["case", "time", "station", "latitude_deg", "longitude_deg", "height_m", "pressure_hpa", "u_m_s", "v_m_s",
           "part", "gross"], stations)
    with (OUT / "analysis_reference.csv").open("w", newline="") as file:
        out = csv.writer(file, lineterminator="\n")
        out.writerow([f"# scipy {scipy.__version__}, numpy {np.__version__}; RMSE in hPa"])
        out.writerow(["case", "hour", "count", "method", "rmse_hpa", "rmse_sea_hpa"])
        out.writerows(results)


main()
