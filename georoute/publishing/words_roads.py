"""Words of plans on roads, in each language; the same ids in both (a test compares them)."""

from __future__ import annotations

__all__ = ["ROADS_ENGLISH", "ROADS_SPANISH"]

ROADS_ENGLISH: dict[str, str] = {
    "along_roads": "Along roads of the map data",
    "some_straight": "Along roads of the map data; thin broken lines are straight, not along roads",
    "roads_estimated_note": "≈ marks an estimate: length along roads of the map data, time from "
    "speeds by class of road ({source}). Traffic, works and lights are not in it. The true drive "
    "time of a leg is expected between {low} and {high} times the figure; clock times follow from "
    "it.",
    "roads_estimated_no_interval": "≈ marks an estimate: length along roads of the map data, time "
    "from speeds by class of road ({source}). Traffic, works and lights are not in it. No interval "
    "is claimed for it.",
    "roads_credit": "Roads: © OpenStreetMap contributors (ODbL)",
    "way_by": "By {roads}.",
    "way_by_more": "By {roads}; and {count} more roads.",
    "way_by_more_one": "By {roads}; and 1 more road.",
    "way_then": ", then ",
    "way_unnamed": "By roads that have no name in the map data.",
    "way_ferry": "Part of this leg is by ferry: ask for its sailings, they are not in this plan.",
    "off_road": "{length} from the road: driving ends there",
    "off_road_named": "{length} from {road}: driving ends there",
    "legend_road_leg": "leg along roads",
    "legend_off_road": "straight, not along roads",
    "legend_ferry": "by ferry",
    "ferry_sign": "ferry",
}

ROADS_SPANISH: dict[str, str] = {
    "along_roads": "Por calles de los datos del mapa",
    "some_straight": "Por calles de los datos del mapa; las líneas finas y cortadas son rectas, no "
    "van por calles",
    "roads_estimated_note": "≈ indica una estimación: longitud por calles de los datos del mapa, "
    "tiempo según velocidades por clase de calle ({source}). No incluye tránsito, obras ni "
    "semáforos. El tiempo real de un tramo se espera entre {low} y {high} veces la cifra; las "
    "horas se derivan de ella.",
    "roads_estimated_no_interval": "≈ indica una estimación: longitud por calles de los datos del "
    "mapa, tiempo según velocidades por clase de calle ({source}). No incluye tránsito, obras ni "
    "semáforos. No se afirma ningún intervalo.",
    "roads_credit": "Calles: © colaboradores de OpenStreetMap (ODbL)",
    "way_by": "Por {roads}.",
    "way_by_more": "Por {roads}; y {count} calles más.",
    "way_by_more_one": "Por {roads}; y 1 calle más.",
    "way_then": ", luego ",
    "way_unnamed": "Por calles sin nombre en los datos del mapa.",
    "way_ferry": "Parte de este tramo va en transbordador: consulte sus salidas, no están en este "
    "plan.",
    "off_road": "a {length} de la calle: ahí termina el manejo",
    "off_road_named": "a {length} de {road}: ahí termina el manejo",
    "legend_road_leg": "tramo por calles",
    "legend_off_road": "recto, no por calles",
    "legend_ferry": "en transbordador",
    "ferry_sign": "transbordador",
}
