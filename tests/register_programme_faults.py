"""A good programme file, and edits that each plant one fault in it."""

from __future__ import annotations

GOOD = """\
title = "Hydrants"
zone = "America/Santiago"
first_date = 2027-03-01
last_date = 2027-03-05
[register]
path = "sites.csv"
[[base]]
base_id = "north"
lat = -29.9
lon = -71.25
[[base]]
base_id = "south"
lat = -29.97
lon = -71.34
[shift]
shift_start = "08:00"
shift_end = "17:00"
paid_h = 8
overtime_limit_h = 1
write_up_min = 30
[calendar]
weekdays = ["mon", "tue", "wed", "thu", "fri"]
days_off = [
  2027-03-02,
]
holiday_country = "CL"
[[inspector]]
inspector_id = "ana"
start_base = "north"
[[inspector]]
inspector_id = "luis"
start_base = "south"
end_base = "north"
[work]
work_min = 20
[tariff]
hour = 20
km = 0.5
[travel]
method = "detour"
[search]
seed = 7
effort = "normal"
"""
WEEKDAYS = 'weekdays = ["mon", "tue", "wed", "thu", "fri"]'


def third_base(name: str, *, lat: str = "-29.95", lon: str = "-71.3") -> str:
    """Return a third base, to be put before the section that follows the second."""
    return f'[[base]]\nbase_id = "{name}"\nlat = {lat}\nlon = {lon}\n[shift]'


# (code, key, line of GOOD that is replaced, new text)
FAULTS: list[tuple[str, str, str, str]] = [
    *(
        ("unknown_zone", "zone", 'zone = "America/Santiago"', f'zone = "{zone}"')
        for zone in ("America/Santigo", "Santiago", "UTC+2", "../etc", "America")
    ),
    ("last_before_first", "last_date", "last_date = 2027-03-05", "last_date = 2027-02-28"),
    ("last_before_first", "last_date", "last_date = 2027-03-05", "last_date = 2026-03-05"),
    ("last_before_first", "last_date", "last_date = 2027-03-05", 'last_date = "2027-01-05"'),
    ("horizon_too_long", "last_date", "last_date = 2027-03-05", "last_date = 2028-03-01"),
    ("horizon_too_long", "last_date", "last_date = 2027-03-05", "last_date = 2030-01-01"),
    ("horizon_too_long", "last_date", "last_date = 2027-03-05", "last_date = 2199-12-31"),
    ("absurd_date", "last_date", "last_date = 2027-03-05", "last_date = 9999-12-31"),
    ("absurd_date", "first_date", "first_date = 2027-03-01", "first_date = 0001-01-01"),
    ("absurd_date", "first_date", "first_date = 2027-03-01", "first_date = 1899-12-31"),
    *(
        ("wrong_type", key, line, new)
        for key, line, new in (
            ("zone", 'zone = "America/Santiago"', "zone = 3"),
            ("first_date", "first_date = 2027-03-01", 'first_date = "01/03/2027"'),
            ("first_date", "first_date = 2027-03-01", "first_date = 2027-03-01T08:00:00"),
            ("base[2].lat", "lat = -29.97", 'lat = "-29,97"'),
            ("shift.shift_start", 'shift_start = "08:00"', 'shift_start = "8 o\'clock"'),
            ("shift.shift_start", 'shift_start = "08:00"', 'shift_start = "24:00"'),
            ("shift.paid_h", "paid_h = 8", "paid_h = true"),
            ("search.seed", "seed = 7", "seed = 7.5"),
            ("work", "[work]", "[[work]]"),
            ("calendar.weekdays", WEEKDAYS, 'weekdays = "mon"'),
        )
    ),
    *(
        ("unknown_key", key, line, new)
        for key, line, new in (
            ("titel", 'title = "Hydrants"', 'titel = "Hydrants"'),
            ("shift.overtime", "overtime_limit_h = 1", "overtime = 1"),
            ("base[1].latitude", "lat = -29.9", "lat = -29.9\nlatitude = 1"),
            ("inspector[2].endbase", 'end_base = "north"', 'endbase = "north"'),
            ("travel.detour.time", "[travel]", "[travel.detour]\ntime = 1\n[travel]"),
        )
    ),
    *(
        ("missing_key", key, line, "#")
        for key, line in (
            ("zone", 'zone = "America/Santiago"'),
            ("first_date", "first_date = 2027-03-01"),
            ("register.path", 'path = "sites.csv"'),
            ("base[2].lon", "lon = -71.34"),
            ("tariff.km", "km = 0.5"),
            ("inspector[1].inspector_id", 'inspector_id = "ana"'),
        )
    ),
    ("duplicate_id", "base[3].base_id", "[shift]", third_base("north")),
    ("duplicate_id", "base[3].base_id", "[shift]", third_base("south")),
    ("duplicate_id", "inspector[2].inspector_id", 'inspector_id = "luis"', 'inspector_id = "ana"'),
    *(
        ("unknown_base", key, line, new)
        for key, line, new in (
            ("inspector[1].start_base", 'start_base = "north"', 'start_base = "nroth"'),
            ("inspector[2].end_base", 'end_base = "north"', 'end_base = "North"'),
            ("inspector[2].start_base", 'start_base = "south"', "#"),
        )
    ),
    *(
        ("negative_money", f"tariff.{key}", "km = 0.5", f"km = 1\n{key} = -0.01")
        for key in ("overtime_hour", "day_opened")
    ),
    ("negative_money", "tariff.hour", "hour = 20", "hour = -20"),
    ("negative_money", "tariff.km", "km = 0.5", "km = -1e9"),
    ("not_finite", "tariff.km", "km = 0.5", "km = nan"),
    ("not_finite", "base[1].lat", "lat = -29.9", "lat = inf"),
    ("not_finite", "work.work_min", "work_min = 20", "work_min = -inf"),
    ("shift_times_equal", "shift.shift_end", 'shift_end = "17:00"', 'shift_end = "08:00"'),
    ("shift_times_equal", "shift.shift_end", 'shift_end = "17:00"', "shift_end = 08:00:00"),
    ("shift_times_equal", "shift.shift_end", 'shift_start = "08:00"', 'shift_start = "17:00"'),
    *(
        ("zero_coordinate", "base[3].lat", "[shift]", third_base("w", lat=lat, lon=lon))
        for lat, lon in (("0", "0"), ("0.0", "-0.0"), ("0e3", "0"))
    ),
    *(
        ("coordinate_out_of_range", key, line, new)
        for key, line, new in (
            ("base[1].lat", "lat = -29.9", "lat = -299"),
            ("base[2].lat", "lat = -29.97", "lat = 90.001"),
            ("base[2].lon", "lon = -71.34", "lon = -7134"),
        )
    ),
    ("unknown_travel_method", "travel.method", 'method = "detour"', 'method = "detuor"'),
    ("unknown_travel_method", "travel.method", 'method = "detour"', 'method = "streets"'),
    ("unknown_travel_method", "travel.method", 'method = "detour"', 'method = "Detour"'),
    *(
        (
            "unknown_road_class",
            f"travel.roads.{table}.{name}",
            'method = "detour"',
            f'method = "detour"\n[travel.roads.{table}]\n{name} = 0.5',
        )
        for table, name in (("speeds", "highway"), ("real_factors", "residental"), ("speeds", "x"))
    ),
    *(
        ("missing_roads", "travel.roads.path", 'method = "detour"', f'method = "roads"{more}')
        for more in ("", "\nspeed_kmh = 9", "\n[travel.roads]\ncountry = 'CL'")
    ),
    ("missing_table", "travel.table", 'method = "detour"', 'method = "table"'),
    ("missing_table", "travel.table", 'method = "detour"', "method = 'table'"),
    ("missing_table", "travel.table", 'method = "detour"', 'method = "table"\nspeed_kmh = 9'),
    *(
        ("unknown_aim", "search.aim", "seed = 7", f'seed = 7\naim = "{aim}"')
        for aim in ("fewest_day", "", "shortest")
    ),
    ("unknown_effort", "search.effort", 'effort = "normal"', 'effort = "norml"'),
    ("unknown_effort", "search.effort", 'effort = "normal"', 'effort = ""'),
    ("unknown_effort", "search.effort", 'effort = "normal"', 'effort = "best"'),
    *(
        ("unknown_holidays", f"calendar.{key}", 'holiday_country = "CL"', new)
        for key, new in (
            ("holiday_country", 'holiday_country = "Chile"'),
            ("holiday_country", 'holiday_country = "cl"'),
            ("holiday_country", 'holiday_country = "HolidayBase"'),
            ("holiday_subdivision", 'holiday_subdivision = "XX"\nholiday_country = "CL"'),
        )
    ),
    *(
        ("unknown_weekday", "calendar.weekdays[1]", WEEKDAYS, f'weekdays = ["{day}"]')
        for day in ("mo", "lun", "monday ,")
    ),
    *(
        ("value_out_of_range", key, line, new)
        for key, line, new in (
            ("shift.paid_h", "paid_h = 8", "paid_h = 25"),
            ("work.work_min", "work_min = 20", "work_min = -1"),
            ("search.seed", "seed = 7", "seed = -7"),
            ("search.seed", "seed = 7", "seed = 99999999999999999999"),
            ("travel.circuity", "[travel]", "[travel]\ncircuity = 0.9"),
            ("calendar.weekdays[2]", WEEKDAYS, "weekdays = [1, 8]"),
        )
    ),
    ("no_time_left", "shift.write_up_min", "write_up_min = 30", "write_up_min = 540"),
    ("no_time_left", "shift.write_up_min", "write_up_min = 30", "write_up_min = 900"),
    ("no_time_left", "shift.write_up_min", "write_up_min = 30", "write_up_min = 1440"),
    ("empty_text", "register.path", 'path = "sites.csv"', 'path = ""'),
    ("empty_text", "base[3].base_id", "[shift]", third_base("")),
    ("empty_text", "inspector[2].inspector_id", 'inspector_id = "luis"', 'inspector_id = " "'),
    *(
        ("separator_in_id", "inspector[2].inspector_id", 'inspector_id = "luis"', new)
        for new in ('inspector_id = "a;b"', 'inspector_id = "a,b"', 'inspector_id = ";"')
    ),
    *(
        ("control_character", "inspector[2].inspector_id", 'inspector_id = "luis"', new)
        for new in (r'inspector_id = "a\nb"', r'inspector_id = "a\tb"', r'inspector_id = "a\u0000"')
    ),
    *(
        ("unknown_mapping", f"register.columns.{key}", "[[base]]", new)
        for key, new in (
            ("siteid", '[register.columns]\nsiteid = "Nr"\n[[base]]'),
            ("latt", '[register.columns]\nlatt = "Nr"\n[[base]]'),
            ("due", '[register.columns]\ndue = "Nr"\n[[base]]'),
        )
    ),
    (
        "overtime_beyond_shift",
        "shift.overtime_limit_h",
        "overtime_limit_h = 1",
        "overtime_limit_h = 2",
    ),
    ("overtime_beyond_shift", "shift.overtime_limit_h", "paid_h = 8", "paid_h = 9"),
    (
        "overtime_beyond_shift",
        "shift.overtime_limit_h",
        'shift_end = "17:00"',
        'shift_end = "16:00"',
    ),
]
