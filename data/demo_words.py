"""The invented words and figures of the demo; every name here is made up.

Work times lie in the ranges that are common practice in each trade (minutes on site, one
inspector): hydrant with flow test 15-30, valve 10-25, water sample 5-15, culvert 15-40,
playground operational 20-40 and yearly 45-90, lift 45-90. They are no rule: set your own.
"""

from __future__ import annotations

from dataclasses import dataclass

Area = tuple[float, float, float, float]  # west, south, east, north in degrees

EVERYWHERE: Area = (-71.36, -30.08, -71.16, -29.83)
TOWNS: Area = (-71.355, -30.00, -71.215, -29.875)
COAST: Area = (-71.355, -29.985, -71.245, -29.88)
STREETS = frozenset({"residential", "living_street", "tertiary", "secondary"})
ROADS = frozenset({"primary", "secondary", "tertiary", "unclassified"})

COLUMNS = (
    "site_id",
    "name",
    "address",
    "lat",
    "lon",
    "task",
    "work_min",
    "access_min",
    "due_date",
    "contact",
    "notes",
    "asset_material",
    "installed_year",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Kind:
    """A kind of site: how many, what is done there and for how long, and where it may lie."""

    prefix: str
    label: str
    task: str
    count: int
    work_min: tuple[int, int]
    access_min: tuple[int, int]
    area: Area
    highways: frozenset[str]
    materials: tuple[str, ...]
    notes: tuple[str, ...]
    share_with_note: float = 0.5


KINDS = (
    Kind(
        prefix="HYD",
        label="Grifo",
        task="hydrant flow test",
        count=30,
        work_min=(15, 30),
        access_min=(2, 5),
        area=TOWNS,
        highways=STREETS,
        materials=("hierro dúctil", "hierro fundido", "latón"),
        notes=(
            "Flush towards the gutter",
            "Cap seized last time; bring the long key",
            "Café opposite asks for a call before flushing",
        ),
    ),
    Kind(
        prefix="VAL",
        label="Válvula",
        task="pressure valve check",
        count=18,
        work_min=(15, 25),
        access_min=(4, 8),
        area=TOWNS,
        highways=STREETS,
        materials=("acero inoxidable", "hierro dúctil"),
        notes=(
            "Chamber: do not enter alone; test the air first",
            "Cover weighs 45 kg: use the lifter",
        ),
    ),
    Kind(
        prefix="SMP",
        label="Punto de muestreo",
        task="water sample",
        count=16,
        work_min=(10, 15),
        access_min=(3, 6),
        area=TOWNS,
        highways=STREETS,
        materials=("acero inoxidable", "PVC"),
        notes=("Tap behind the grey box, key 12", "Run the tap for five minutes"),
    ),
    Kind(
        prefix="CUL",
        label="Alcantarilla",
        task="culvert inspection",
        count=20,
        work_min=(20, 40),
        access_min=(5, 10),
        area=EVERYWHERE,
        highways=ROADS,
        materials=("hormigón", "acero galvanizado", "HDPE"),
        notes=(
            "Park beyond the bend, hazard lights on",
            "Soft verge after rain",
            'Marker post reads "K 4"',
        ),
    ),
    Kind(
        prefix="PLY",
        label="Plaza de juegos",
        task="playground inspection",
        count=22,
        work_min=(35, 75),
        access_min=(3, 8),
        area=TOWNS,
        highways=STREETS,
        materials=("pino tratado", "acero pintado", "polietileno"),
        notes=(
            "Swing chains replaced last year",
            "Gate to the west, number lock",
            "Niños after 16:00: come early",
        ),
    ),
    Kind(
        prefix="LFT",
        label="Ascensor",
        task="lift examination",
        count=13,
        work_min=(60, 90),
        access_min=(8, 12),
        area=COAST,
        highways=STREETS,
        materials=("acero", "acero y vidrio"),
        notes=("Sign in at the front desk", "Machine room key at reception; ring twice"),
    ),
    # One site that no shift can take, so that the demo shows how a reason reads.
    Kind(
        prefix="SIP",
        label="Sifón",
        task="siphon draw-down",
        count=1,
        work_min=(510, 510),
        access_min=(30, 30),
        area=(-71.20, -30.08, -71.16, -29.83),
        highways=STREETS | ROADS,
        materials=("hormigón",),
        notes=("Draw down, inspect and refill in one go: more than a day's work for one person",),
        share_with_note=1.0,
    ),
)

NAME_HEADS = ("Alto", "Bajada", "Esquina", "Loma", "Mirador", "Patio", "Recodo", "Rincón")
NAME_TAILS = (
    "Añañuca Blanca",
    "Árbol Solo",
    "Caracol Azul",
    "Chañar Viejo",
    "Cigüeña Gris",
    "Copao Dulce",
    "Garúa Fina",
    "Huiro Negro",
    "Niña Aurora",
    "Ñandú Quieto",
    "Paño de Luz",
    "Peñón Partido",
    "Pingüino Cojo",
    "Sal y Canción",
    "Tres Jarrones",
    "Vaivén Lento",
)

# Where the bases lie: key in the programme's text, street, and a place near by (lon, lat).
BASES = (
    ("norte", "Avenida Islón", (-71.2350, -29.8950)),
    ("sur", "Avenida La Cantera", (-71.3150, -29.9650)),
)

PROGRAMME = """\
# The working week of an invented inspection office on the coast of La Serena and Coquimbo, Chile.
# The office, its people, bases and sites are made up; streets: (c) OpenStreetMap contributors.
# Every hour, limit and price here is an example: set those of your law, your contract, your office.

title = "Oficina de Inspección Bahía Clara, week of 1 March 2027"
zone = "America/Santiago"
first_date = 2027-03-01
last_date = 2027-03-05

[register]
path = "register.csv"
credit = "© OpenStreetMap contributors (ODbL)"

[[base]]
base_id = "norte"
name = "Base Norte"
lat = $norte_lat
lon = $norte_lon

[[base]]
base_id = "sur"
name = "Base Sur"
lat = $sur_lat
lon = $sur_lon

[shift]
shift_start = "08:00"
shift_end = "17:30"
paid_h = 8.0
overtime_limit_h = 0.5
write_up_min = 30

[calendar]
weekdays = ["mon", "tue", "wed", "thu", "fri"]
holiday_country = "CL"

[[inspector]]
inspector_id = "amparo"
name = "Amparo Quilodrán"
start_base = "norte"

[[inspector]]
inspector_id = "benito"
name = "Benito Larenas"
start_base = "sur"

[[inspector]]
inspector_id = "ximena"
name = "Ximena Ñancupil"
start_base = "norte"
end_base = "norte"
days_off = [2027-03-05] # training

[work]
work_min = 30
access_min = 5

[tariff]
currency = "CLP"
hour = 14500
km = 260
overtime_hour = 29000
day_opened = 2500

[travel]
method = "detour" # times and lengths are estimated from straight lines

[search]
seed = 2027
effort = "normal"
"""
