"""Reads character reports with two published decoders and keeps what they say.

Usage: character_forms.py SAMPLES METAR_SDIST OUT.json.gz
SAMPLES is this project's samples/ (invented reports), METAR_SDIST the unpacked source of PyPI metar 2.0.2
(BSD), whose own tests hold real reports. Further reports are written below from a fixed seed, with forms that
the samples do not have. Needs pymetdecoder==0.2.2 and metar==2.0.2.

Each line of OUT is a report and what the decoder said, in the units of the code. Left out, since there the
decoders are known to differ from the standard:
  pymetdecoder: the speed of a gust of 99 units and more (its 00fff is not read); 910ff and 911ff are told apart
  here by the period it gives; heights of the 850 hPa surface on low land (it knows no other meaning of 48hhh).
  metar: the sign of 5appp (not given), reports that it cannot parse at all.
"""
import gzip
import importlib.metadata
import json
import random
import re
import sys
import warnings
from pathlib import Path

from metar import Metar
from pymetdecoder import synop

samples, sdist, out = (Path(argument) for argument in sys.argv[1:4])
warnings.simplefilter("ignore")
dice = random.Random(20260115)
VERSIONS = {name: importlib.metadata.version(name) for name in ("pymetdecoder", "metar")}


def figures(value, width):
    return f"{value:0{width}d}" if dice.random() > 0.04 else "/" * width


def signed(indicator, tenths):
    if dice.random() < 0.04:
        return f"{indicator}////"
    return f"{indicator}{0 if tenths >= 0 else 1}{abs(tenths):03d}"


def pressure(indicator, tenths):
    return f"{indicator}{tenths % 10000:04d}" if dice.random() > 0.04 else f"{indicator}////"


def body(ship, iw):
    groups = [f"{dice.randint(0, 4)}{dice.choice('1234567')}{dice.choice('0123456789/')}{dice.randint(50, 99)}"]
    direction = dice.choice([dice.randint(1, 36)] * 8 + [0, 99])
    speed = 0 if direction == 0 else dice.choice([dice.randint(1, 60)] * 9 + [dice.randint(99, 130)])
    cloud = dice.choice("0123456789/")
    if speed >= 99:
        groups += [f"{cloud}{direction:02d}99", f"00{speed:03d}"]
    else:
        groups.append(f"{cloud}{direction:02d}{speed:02d}")
    air = dice.randint(-450, 450)
    groups.append(signed(1, air))
    if dice.random() < 0.2:
        groups.append(f"29{dice.randint(5, 100):03d}")
    else:
        groups.append(signed(2, air - dice.randint(0, 120)))
    high = not ship and dice.random() < 0.15
    if high:
        station = dice.randint(5000, 9300)
        groups.append(pressure(3, station))
        a3, low, top = dice.choice([(2, 400, 999), (7, 500, 999), (7, 0, 499), (5, 0, 899)] + [(8, 0, 999)] * 2)
        groups.append(f"4{a3}{dice.randint(low, top):03d}")
    else:
        msl = dice.randint(9300, 10600)
        if not ship or dice.random() < 0.2:
            groups.append(pressure(3, msl - dice.randint(0, 300)))
        groups.append(pressure(4, msl))
    a = dice.randint(0, 8)
    if dice.random() < 0.9:
        groups.append(f"5{a}{0 if a == 4 else dice.randint(1, 180):03d}")
    if dice.random() < 0.4:
        groups.append(f"6{dice.randint(0, 60):03d}{dice.randint(1, 4)}")
    if dice.random() < 0.5:
        groups.append(f"7{dice.randint(4, 99):02d}{dice.randint(0, 9)}{dice.randint(0, 9)}")
    if dice.random() < 0.6:
        groups.append(f"8{dice.randint(1, 8)}{dice.randint(0, 9)}{dice.randint(0, 9)}{dice.randint(0, 9)}")
    if ship:
        moving = dice.random() < 0.8
        groups.append(f"222{dice.randint(1, 8)}{dice.randint(1, 9)}" if moving else "22200")
        sea = dice.randint(-18, 310)
        kind = 2 * dice.randint(0, 3) + (1 if sea < 0 else 0)
        groups.append(f"0{kind}{abs(sea):03d}")
        if dice.random() < 0.5:
            groups.append(f"2{dice.randint(2, 15):02d}{dice.randint(1, 20):02d}")
    if dice.random() < 0.6:
        groups.append("333")
        if dice.random() < 0.5:
            groups.append(signed(1, air + dice.randint(0, 80)))
        if dice.random() < 0.7:
            groups.append(f"5{dice.choice('89')}{dice.randint(0, 300):03d}")
        if dice.random() < 0.7 and iw in "0134":
            groups.append(f"910{dice.randint(10, 98):02d}")
        if dice.random() < 0.3 and iw in "0134":
            groups.append(f"911{dice.randint(10, 98):02d}")
    return " ".join(groups)


def written():
    for _ in range(220):
        iw = dice.choice("0134")
        yield f"AAXX {dice.randint(1, 14):02d}{dice.randint(0, 23):02d}{iw} {dice.randint(1, 98):02d}{dice.randint(1, 998):03d} {body(False, iw)}"
    for _ in range(160):
        iw = dice.choice("0134")
        sign = "".join(dice.choice("ABCDEFGHIJKLMNOPQRSTUVWXYZ") for _ in range(4)) + str(dice.randint(0, 9))
        place = f"99{dice.randint(0, 900):03d} {dice.choice('1357')}{dice.randint(0, 1800):04d}"
        yield f"BBXX {sign} {dice.randint(1, 14):02d}{dice.randint(0, 23):02d}{iw} {place} {body(True, iw)}"
    for _ in range(30):
        iw = dice.choice("0134")
        north, east, quadrant = dice.randint(0, 900), dice.randint(0, 1800), dice.choice("1357")
        height = f"{dice.randint(0, 1400):04d}{dice.randint(1, 8)}"
        yield (f"OOXX {dice.choice('ABCDE')}MOB {dice.randint(1, 14):02d}{dice.randint(0, 23):02d}{iw} 99{north:03d} "
               f"{quadrant}{east:04d} {dice.randint(1, 600):03d}{north // 10 % 10}{east // 10 % 10} {height} {body(False, iw)}")
    for _ in range(140):
        yield written_metar()


def written_metar():
    unit = dice.choice(["KT", "KT", "KT", "MPS"])
    station = dice.choice(["EGPF", "KBOS", "UUEE", "YSSY", "SBGR", "FACT", "RJTT"])
    direction = dice.choice([f"{dice.randint(1, 36) * 10:03d}"] * 6 + ["VRB"])
    speed = dice.randint(1, 45 if unit == "KT" else 20)
    wind = f"{direction}{speed:02d}" + (f"G{speed + dice.randint(10, 30):02d}" if dice.random() < 0.3 else "") + unit
    if dice.random() < 0.08:
        wind = "00000" + unit
    groups = [dice.choice(["METAR", "SPECI"]), station, f"{dice.randint(1, 14):02d}{dice.randint(0, 23):02d}{dice.randint(0, 59):02d}Z"]
    if dice.random() < 0.3:
        groups.append("AUTO")
    groups.append(wind)
    if dice.random() < 0.2 and direction != "VRB":
        groups.append(f"{dice.randint(1, 17) * 10:03d}V{dice.randint(18, 36) * 10:03d}")
    groups.append(dice.choice(["9999", "CAVOK", "4000 -RA", "0800 FG", "10SM", "1 1/2SM BR"]))
    if groups[-1] != "CAVOK":
        groups.append(dice.choice(["SCT020", "BKN008 OVC015", "FEW030CB", "OVC003", "NSC"]))

    def whole(value):
        return f"{'M' if value < 0 else ''}{abs(value):02d}"

    air = dice.randint(-38, 42)
    groups.append(f"{whole(air)}/{whole(air - dice.randint(0, 12)) if dice.random() > 0.05 else ''}")
    inches = dice.random() < 0.5
    groups.append(f"A{dice.randint(2750, 3120):04d}" if inches else f"Q{dice.randint(930, 1060):04d}")
    if inches:
        groups.append(f"RMK AO2 SLP{dice.choice([dice.randint(0, 390), dice.randint(610, 999)]):03d} T{dice.choice('01')}{dice.randint(0, 300):03d}{dice.choice('01')}{dice.randint(0, 300):03d}")
    elif dice.random() < 0.4:
        groups.append(dice.choice(["NOSIG", "TEMPO 25035G50KT", "BECMG 30010KT CAVOK"]))
    return " ".join(groups)


def from_samples():
    """One in a few of the reports of the sample feeds, garbled ones left out."""
    for path in sorted(samples.glob("*/feed/A_*")):
        raw = path.read_bytes()
        text = (gzip.decompress(raw) if path.suffix == ".gz" else raw).decode("ascii", "replace")
        opening = None
        for report in text.replace("\r", "").split("="):
            report = " ".join(report.split())
            found = re.search(r"AAXX \d{5}", report)
            if found:
                opening = found.group(0)
                report = report[found.end():].strip()
            ship = re.search(r"(BBXX .*|METAR .*|SPECI .*)$", report)
            if dice.random() > 0.06:
                continue
            if ship:
                yield ship.group(1)
            elif opening and re.fullmatch(r"\d{5}( [\d/]{3,5})+", report):
                yield f"{opening} {report}"


def from_metar_tests():
    text = (sdist / "test/test_metar.py").read_text()
    # Adjacent literals are one report.
    text = re.sub(r'"\s*\n\s*"', "", text)
    for report in re.findall(r'"((?:METAR |SPECI )?[A-Z]{4} \d{6}Z[^"{}%]*)"', text):
        yield report.strip()


def value(entry, key="value"):
    return None if entry is None else entry.get(key)


def of_synop(text):
    found = synop.SYNOP().decode(text)
    wind = found.get("surface_wind") or {}
    direction, speed = wind.get("direction") or {}, wind.get("speed") or {}
    place = found.get("station_position") or {}
    tendency = found.get("pressure_tendency") or {}
    geopotential = found.get("geopotential") or {}
    displacement = found.get("displacement") or {}
    gusts = found.get("highest_gust") or []
    latest = [value(gust.get("speed")) for gust in gusts if gust and gust.get("measure_period")]
    past = [value(gust.get("speed")) for gust in gusts if gust and not gust.get("measure_period")]
    return {
        "library": "pymetdecoder",
        "station": value(found.get("station_id")) or value(found.get("callsign")),
        "day": value(found["obs_time"]["day"]),
        "hour": value(found["obs_time"]["hour"]),
        "latitude_deg": place.get("latitude"),
        "longitude_deg": place.get("longitude"),
        "elevation": place.get("elevation"),
        "wind_unit": value(found.get("wind_indicator"), "unit"),
        "wind_estimated": value(found.get("wind_indicator"), "estimated"),
        "wind_from_deg": None if direction.get("calm") else direction.get("value"),
        "wind_variable": bool(direction.get("varAllUnknown")),
        "wind_calm": bool(direction.get("calm")),
        "wind_speed": speed.get("value"),
        "gust": (latest or past or [None])[0],
        "air_temperature_c": value(found.get("air_temperature")),
        "dew_point_c": value(found.get("dewpoint_temperature")),
        "relative_humidity_percent": value(found.get("relative_humidity")),
        "pressure_station_hpa": value(found.get("station_pressure")),
        "pressure_msl_hpa": value(found.get("sea_level_pressure")),
        "surface_hpa": value(geopotential.get("surface")),
        "surface_gpm": value(geopotential.get("height")),
        "characteristic": value(tendency.get("tendency")),
        "pressure_change_3h_hpa": value(tendency.get("change")),
        "pressure_change_24h_hpa": value(found.get("pressure_change")),
        "sea_temperature_c": value(found.get("sea_surface_temperature")),
        "course_word": value(displacement.get("direction")),
        "course_code": value(displacement.get("direction"), "_code"),
        "speed_code": value(displacement.get("speed"), "_code"),
    }


def of_metar(text):
    day = int(re.search(r"\b(\d{2})\d{4}Z", text).group(1))
    month = 1 if day <= 15 else 12
    found = Metar.Metar(text, month=month, year=2026 if month == 1 else 2025, strict=False)

    def in_unit(quantity, unit):
        return None if quantity is None else round(quantity.value(unit), 9)

    hpa = None if found.press is None else round(found.press.value("HPA"), 6)
    return {
        "library": "metar",
        "station": found.station_id,
        "time": found.time.strftime("%Y-%m-%dT%H:%M:00Z"),
        "wind_from_deg": None if found.wind_dir is None else found.wind_dir.value(),
        "wind_speed_m_s": in_unit(found.wind_speed, "MPS"),
        "wind_gust_m_s": in_unit(found.wind_gust, "MPS"),
        "air_temperature_c": in_unit(found.temp, "C"),
        "dew_point_c": in_unit(found.dewpt, "C"),
        "altimeter_hpa": hpa,
        "altimeter_inches": found.press is not None and found.press._units == "IN",
        "pressure_msl_hpa": in_unit(found.press_sea_level, "HPA"),
    }


rows, unread = [], 0
for source, reports in (("written", written()), ("samples", from_samples()), ("metar tests", from_metar_tests())):
    for text in reports:
        try:
            is_synop = text.split()[0] in ("AAXX", "BBXX", "OOXX")
            rows.append({"source": source, "text": text, "expected": of_synop(text) if is_synop else of_metar(text)})
        except Exception as error:  # The library cannot read it: there is nothing to compare with.
            unread += 1
            print(f"not read by the library: {text!r}: {error}", file=sys.stderr)
with gzip.GzipFile(out, "wb", mtime=0) as file:
    file.write((json.dumps({"versions": VERSIONS}) + "\n").encode())
    for row in rows:
        file.write((json.dumps(row) + "\n").encode())
print(f"{len(rows)} reports kept, {unread} not read by a library", VERSIONS)
