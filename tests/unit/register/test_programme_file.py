"""What a programme file becomes."""

from __future__ import annotations

import re
from datetime import date, time
from pathlib import Path

import holidays
import pytest

from georoute.domain.programme import Programme, RoadSettings, TravelMethod
from georoute.domain.run import EFFORTS, Aim
from georoute.register import check_programme, programme_fields, read_programme
from georoute.register.schema import DEFAULT_DETOUR

SHORTEST = """\
zone = "America/Santiago"
first_date = 2027-03-01
last_date = 2027-03-05
register = { path = "sites.csv" }
base = [{ base_id = "north", lat = -29.9, lon = -71.25 }]
inspector = [{ inspector_id = "ana", shift_start = "08:00", shift_end = 16:30:00 }]
tariff = { hour = 20, km = 0.5 }
"""

WHOLE = """\
title = "Hydrants"
zone = "Europe/Berlin"
first_date = 2027-05-01
last_date = "2027-05-31"

[register]
path = "in/sites.xlsx"
sheet = "2027"
layer = "l"
crs = "EPSG:25833"
credit = "Town of Example, open data"
[register.columns]
site_id = "Nr"
lat = "Hochwert"

[[base]]
base_id = "n"
name = "North yard"
lat = 52.5
lon = 13.4
[[base]]
base_id = "s"
lat = 52.4
lon = 13.4

[shift]
shift_start = "07:30"
shift_end = "16:00"
paid_h = 8
overtime_limit_h = 0.5
write_up_min = 30
load_limit = 200

[calendar]
weekdays = ["mon", "Tuesday", 3, "THU", "fri"]
days_off = [2027-05-10]
holiday_country = "DE"
holiday_subdivision = "BE"
extra_holidays = [{ date = 2027-05-11, name = "Yard closed" }]

[[inspector]]
inspector_id = "ana"
start_base = "n"

[[inspector]]
inspector_id = "luis"
name = "Luis Vera"
start_base = "s"
end_base = "n"
shift_start = "22:00"
shift_end = "06:00"
paid_h = 7
overtime_limit_h = 0
write_up_min = 0
load_limit = 50
weekdays = [6, 7]
days_off = [2027-05-15]
holiday_country = ""
extra_holidays = [{ date = 2027-05-16 }]

[work]
work_min = 12.5
access_min = 0

[tariff]
currency = "CLP"
hour = 20
km = 0.5
overtime_hour = 30
day_opened = 10

[travel]
method = "table"
speed_kmh = 40
circuity = 1.3
table = "in/travel.csv"
[travel.detour]
length_at_1km = 1.5
length_exponent = 0.95
time_at_1km_min = 2
time_exponent = 0.8
low_factor = 0.8
high_factor = 1.25

[travel.roads]
path = "town.osm.pbf"
country = "cl"
snap_limit_m = 250.0
vehicle_height_m = 2.9
vehicle_width_m = 2.1
vehicle_weight_t = 3.5

[travel.roads.speeds]
residential = 30.0
[travel.roads.real_factors]
track = 0.4

[search]
aim = "fewest_days"
seed = 7
effort = "quick"
seconds = 2.5
"""


def programme_of(tmp_path: Path, text: str) -> Programme:
    path = tmp_path / "programme.toml"
    path.write_text(text, encoding="utf-8")
    assert check_programme(path) == ()
    return read_programme(path)


def test_the_shortest_programme(tmp_path: Path) -> None:
    programme = programme_of(tmp_path, SHORTEST)
    (inspector,), (base,) = programme.inspectors, programme.bases
    assert programme.zone == "America/Santiago"
    assert (programme.first_date, programme.last_date) == (date(2027, 3, 1), date(2027, 3, 5))
    assert (base.name, base.lat_deg, base.lon_deg) == ("north", -29.9, -71.25)
    assert (inspector.start_base_id, inspector.end_base_id) == ("north", "north")
    assert (inspector.shift_start, inspector.shift_end) == (time(8), time(16, 30))
    assert (inspector.paid_s, inspector.overtime_limit_s) == (8.5 * 3600, 0.0)
    assert (inspector.write_up_s, inspector.load_limit) == (0.0, None)
    assert inspector.calendar.weekdays == {1, 2, 3, 4, 5}
    assert (programme.tariff.hour, programme.tariff.overtime_hour) == (20.0, 20.0)
    assert (programme.default_work_s, programme.default_access_s) == (1800.0, 300.0)
    assert programme.travel.method is TravelMethod.DETOUR
    assert programme.travel.detour == DEFAULT_DETOUR
    assert programme.effort == EFFORTS["normal"]
    assert programme.register.path == str(tmp_path / "sites.csv")
    assert len(programme.shifts()) == 5
    assert re.fullmatch("[0-9a-f]{64}", programme.sha256)


def test_every_key_arrives(tmp_path: Path) -> None:
    programme = programme_of(tmp_path, WHOLE)
    ana, luis = programme.inspectors
    assert (programme.title, programme.last_date) == ("Hydrants", date(2027, 5, 31))
    assert programme.register.path == str(tmp_path / "in/sites.xlsx")
    assert (programme.register.sheet, programme.register.layer) == ("2027", "l")
    assert programme.register.crs == "EPSG:25833"
    assert programme.register.credit == "Town of Example, open data"
    assert dict(programme.register.columns) == {"site_id": "Nr", "lat": "Hochwert"}
    assert (ana.name, ana.start_base_id, ana.end_base_id) == ("ana", "n", "n")
    assert (ana.shift_start, ana.shift_end, ana.paid_s) == (time(7, 30), time(16), 28_800.0)
    assert (ana.overtime_limit_s, ana.write_up_s, ana.load_limit) == (1800.0, 1800.0, 200.0)
    assert ana.calendar.weekdays == {1, 2, 3, 4, 5}
    assert ana.calendar.days_off == {date(2027, 5, 10)}
    assert (luis.name, luis.start_base_id, luis.end_base_id) == ("Luis Vera", "s", "n")
    assert (luis.shift_start, luis.shift_end, luis.paid_s) == (time(22), time(6), 25_200.0)
    assert (luis.overtime_limit_s, luis.write_up_s, luis.load_limit) == (0.0, 0.0, 50.0)
    assert luis.calendar.weekdays == {6, 7}
    assert luis.calendar.days_off == {date(2027, 5, 10), date(2027, 5, 15)}
    assert set(luis.calendar.holidays) == {date(2027, 5, 11), date(2027, 5, 16)}
    assert (programme.default_work_s, programme.default_access_s) == (750.0, 0.0)
    tariff, travel = programme.tariff, programme.travel
    assert (tariff.currency, tariff.hour, tariff.km) == ("CLP", 20.0, 0.5)
    assert (tariff.overtime_hour, tariff.day_opened) == (30.0, 10.0)
    assert (travel.method, travel.speed_kmh, travel.circuity) == (TravelMethod.TABLE, 40.0, 1.3)
    assert travel.table_path == str(tmp_path / "in/travel.csv")
    assert travel.roads == RoadSettings(
        path=str(tmp_path / "town.osm.pbf"),
        country="CL",
        speeds_kmh={"residential": 30.0},
        real_factors={"track": 0.4},
        snap_limit_m=250.0,
        vehicle_height_m=2.9,
        vehicle_width_m=2.1,
        vehicle_weight_t=3.5,
    )
    assert (travel.detour.length_at_1km, travel.detour.length_exponent) == (1.5, 0.95)
    assert (travel.detour.time_at_1km_min, travel.detour.time_exponent) == (2.0, 0.8)
    assert (travel.detour.low_factor, travel.detour.high_factor) == (0.8, 1.25)
    assert (programme.seed, programme.effort.name, programme.effort.seconds) == (7, "quick", 2.5)
    assert programme.aim is Aim.FEWEST_DAYS


def test_holidays_are_those_of_the_country_and_its_part(tmp_path: Path) -> None:
    """The list of the `holidays` library, asked directly; 1 May 2027 is a Saturday."""
    ana, _ = programme_of(tmp_path, WHOLE).inspectors
    listed = holidays.country_holidays("DE", subdiv="BE", years=2027, language="de")
    expected = {day for day in listed if day.month == 5} | {date(2027, 5, 11)}
    assert {date(2027, 5, 6), date(2027, 5, 17)} < expected  # Ascension Day, Whit Monday
    assert set(ana.calendar.holidays) == expected
    assert ana.calendar.holidays[date(2027, 5, 6)] == listed[date(2027, 5, 6)]
    assert ana.calendar.holidays[date(2027, 5, 11)] == "Yard closed"
    assert not ana.calendar.works_on(date(2027, 5, 6))


def test_names_of_holidays_do_not_depend_on_the_machine(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    names = []
    for language in ("en_US.UTF-8", "de_DE.UTF-8", "C"):
        for variable in ("LANG", "LANGUAGE", "LC_ALL"):
            monkeypatch.setenv(variable, language)
        names.append(programme_of(tmp_path, WHOLE).inspectors[0].calendar.holidays)
    assert names[0] == names[1] == names[2]


def test_windows_line_ends_and_a_byte_order_mark_do_no_harm(tmp_path: Path) -> None:
    path = tmp_path / "programme.toml"
    path.write_bytes(b"\xef\xbb\xbf" + SHORTEST.replace("\n", "\r\n").encode())
    assert read_programme(path).zone == "America/Santiago"


def test_the_detour_model_agrees_with_the_bands_it_is_made_from() -> None:
    """Measured on the roads of a real town: circuity by distance, crow-fly speed 25-50 km/h."""
    model = DEFAULT_DETOUR
    for low_km, high_km, circuity in ((3.0, 10.0, 1.42), (10.0, 30.0, 1.29)):
        middle = (low_km * high_km) ** 0.5
        assert model.length_at_1km * middle**model.length_exponent / middle == pytest.approx(
            circuity, rel=0.03
        )
    assert model.length_at_1km * (2 / 3) ** (model.length_exponent - 1) == pytest.approx(
        1.88, rel=0.03
    )
    speeds = [60 * d / (model.time_at_1km_min * d**model.time_exponent) for d in (1.0, 14.4)]
    assert speeds == pytest.approx([25.0, 50.0], rel=0.01)
    assert (model.low_factor, model.high_factor) == pytest.approx((1 / 1.37, 1 / 0.73), abs=0.005)


def test_the_table_of_keys_is_whole() -> None:
    rows = list(programme_fields())
    assert all(row.meaning.endswith(".") and row.kind for row in rows)
    assert len({row.key for row in rows}) == len(rows)
    assert rows[0].key == "title"
    keys = {row.key.rpartition(" ")[2].rpartition(".")[2] for row in rows}
    written = set(re.findall(r"^(\w+) = ", WHOLE, flags=re.MULTILINE)) | {
        "columns",
        "speeds",
        "real_factors",
    }
    assert written - {"site_id", "residential", "track"} == keys
    needed = {row.key for row in rows if row.default == "needed"}
    assert needed == {
        "zone",
        "first_date",
        "last_date",
        "register.path",
        "[[base]] base_id",
        "[[base]] lat",
        "[[base]] lon",
        "[[inspector]] inspector_id",
        "tariff.hour",
        "tariff.km",
    }
