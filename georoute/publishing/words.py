"""Every word of the pages, in one catalogue: id to text, by language.

Texts are plain: no markup, only ``{name}`` places to fill. Words that scripts of a page need
travel in its data island (ids that begin with ``map_``), so they are found here too.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.publishing.words_es import SPANISH
from georoute.publishing.words_office import OFFICE_ENGLISH, OFFICE_SPANISH
from georoute.publishing.words_roads import ROADS_ENGLISH, ROADS_SPANISH

if TYPE_CHECKING:
    from collections.abc import Mapping

__all__ = ["ENGLISH", "LANGUAGES", "Words", "words_for"]

ENGLISH: dict[str, str] = {
    # language of the figures
    "decimal": ".",
    "weekdays": "Monday Tuesday Wednesday Thursday Friday Saturday Sunday",
    "weekdays_short": "Mon Tue Wed Thu Fri Sat Sun",
    "months": "January February March April May June July August September October November "
    "December",
    "months_short": "Jan Feb Mar Apr May Jun Jul Aug Sep Oct Nov Dec",
    "date_long": "{weekday} {day} {month} {year}",
    "date_short": "{weekday} {day} {month}",
    "hours_minutes": "{hours} h {minutes:02d} min",
    "minutes": "{minutes} min",
    "hours_compact": "{hours} h",
    "kilometres": "{km} km",
    "next_day": "{clock} next day",
    "approx": "≈\u202f{figure}",
    "interval": "{low} to {high}",
    # caution and honesty
    "caution": "Caution",
    "caution_text": "Times are estimates. Obey signs, closures and weight/height limits \u2013 "
    "they are not all in this data. Read or change the plan only while parked. Local law, your "
    "employer's rules and licensed practice prevail.",
    "caution_more": "Breaks are not placed in this plan: keep time for them. Do not go on when "
    "tired; report an unsafe schedule. Limits of vehicles are not checked. Only persons with the "
    "required licence or certificate may inspect. Not for emergency dispatch. This page may hold "
    "personal data: keep it among those who need it.",
    "straight": "Straight lines between stops, not along roads",
    "straight_estimated": "Straight lines, not along roads; all times are estimates",
    "times_estimated": "all times are estimates",
    "estimated_note": "≈ marks an estimate, not measured on roads ({source}). The true drive time "
    "of a leg is expected between {low} and {high} times the figure; clock times follow from it.",
    "estimated_no_interval": "≈ marks an estimate, not measured on roads ({source}). No interval "
    "is claimed for it.",
    "measured_note": "Travel figures: {source}.",
    "no_bound": "No bound computed yet: the order is improved, not proven.",
    "bound_exact": "Order within this day proven best for these travel figures ({method}).",
    "bound_lower": "Proven lower bound on this day's travel cost: {value} ({method}).",
    "not_issued": "not issued",
    "issued": "issued {when} ({zone})",
    "revision": "Revision {revision}",
    "plan_id": "Plan {plan}",
    "made_with": "georoute {version} · seed {seed} · effort {effort} · search ended: {rule}",
    "stop_rule_effort_used": "effort used",
    "stop_rule_seconds_used": "seconds used",
    "stop_rule_interrupted": "interrupted",
    "register_hash": "Register {source}, SHA-256 {digest}",
    "data_credit": "Data: {credit}",
    "about": "About this page",
    "library": "Map drawn with Leaflet 1.9.4 (BSD 2-Clause; licence text in the page source).",
    # page frame
    "to_run_list": "Skip to the run list",
    "to_tours": "Skip to the table of tours",
    "overview": "Overview",
    "run_sheet": "Run sheet for paper",
    "run_sheet_title": "Run sheet",
    "day_page": "Day page with map",
    "pages": "Other pages",
    "view": "View",
    "theme_paper": "Paper",
    "theme_glare": "Glare",
    "theme_night": "Night",
    "no_script": "The map needs JavaScript. The run list says the same in words.",
    "print_note": "The map of this page is for the screen; run sheets have a sketch for paper.",
    "no_script_overview": "The map needs JavaScript. The table says the same in words.",
    # day page
    "day_title": "{date} · {inspector}",
    "from_base": "from {base}",
    "from_to_base": "from {base} to {end}",
    "totals": "Totals of the day",
    "stops": "Stops",
    "out": "Out",
    "back": "Back",
    "finish": "Finish",
    "drive": "Drive",
    "distance": "Distance",
    "work": "Work",
    "wait": "Wait",
    "write_up": "Write-up",
    "overtime": "Overtime",
    "load": "Load",
    "cost": "Cost",
    "finish_line": "Expected finish {finish}, shift ends {end}.",
    "tell_line": "Tell the person your employer has named when you leave, when you finish, and at "
    "once if you will be later than {end}. This plan holds no name for that.",
    "run_list": "Run list",
    "legend": "Legend",
    "time_rule": "Time rule",
    "time_rule_text": "{date}: out {out}, {stops} stops, back {back}, finish {finish}. The run "
    "list gives every time in words.",
    "leave": "leave",
    "arrive": "arrive",
    "latest": "latest arrival",
    "back_at": "Back at {base}",
    "finish_after": "finish after write-up",
    "task": "Task",
    "window": "Work may start",
    "any_time": "any time",
    "work_minutes": "Work",
    "access_minutes": "{work} + {access} access",
    "address": "Address",
    "contact": "Contact",
    "notes": "Notes, access, key",
    "coordinates": "Coordinates",
    "due": "Due",
    "overdue": "overdue: was due {date}",
    "site_id": "Site",
    "wait_minutes": "wait {minutes} min",
    "late_minutes": "late {minutes} min",
    "early_text": "Early: wait {minutes} min, work starts {start}",
    "late_text": "Late by {minutes} min for its opening hours",
    "leg_text": "Drive {time} · {km}",
    "home_leg": "Last leg, back to base: drive {time} · {km}",
    "show_on_map": "show on the map",
    "slack": "slack {time}",
    "shift_frame": "shift {start}\u2013{end}",
    "result": "Result",
    # legend
    "legend_plate": "stop number, arrival",
    "legend_wait": "early: wait before work",
    "legend_late": "late for opening hours",
    "legend_leg": "leg, straight, not along roads",
    "legend_home": "last leg, back to base",
    "legend_base": "base",
    "legend_work": "work",
    "legend_waiting": "wait",
    "legend_write_up": "write-up",
    "legend_window": "opening hours of a stop",
    "legend_hue": "colour = inspector",
    "legend_weekday": "dash and mark = weekday",
    # overview
    "overview_title": "{first} to {last}",
    "unplaced": "Not placed",
    "unplaced_count": "{count} of {visits} visits are not placed",
    "all_placed": "All {visits} visits are placed.",
    "visit": "Visit",
    "reason": "Reason",
    "capacity": "Capacity",
    "capacity_line": "{visits} visits need {work} of work and at least {travel} of travel; "
    "{shifts} shifts give {shift} and up to {overtime} of overtime.",
    "capacity_short": "Short by {short}: this cannot all be done.",
    "capacity_enough": "The sum alone does not rule the work out.",
    "tours": "Tours",
    "tour": "Tour",
    "stops_late": "{stops}, {late} late",
    "out_back": "Out\u2013back",
    "day_bar": "hour of the day",
    "all_tours": "All tours",
    "show_tour": "on the map",
    "open_sheet": "sheet",
    "map_tag": "{date}, {count} stops",
    "map_tag_one": "{date}, 1 stop",
    "no_tours": "No tour: nothing is placed.",
    # map controls and states
    "map_name": "Map of the tour",
    "map_overview_name": "Map of all tours",
    "map_zoom_in": "Zoom in",
    "map_zoom_out": "Zoom out",
    "map_fit": "Whole tour",
    "map_fit_all": "All tours",
    "map_previous": "Previous stop",
    "map_next": "Next stop",
    "map_north": "North is up",
    "map_letters": "N S E W",
    "map_shown": "Stop {number}, {name}, is shown on the map",
    "map_next_stop": "next stop",
    "map_no_room": "No room here for {count} of the labels: zoom in.",
    "map_too_many": "Tags are shown for up to {count} tours: choose fewer in the table.",
    # reasons
    "reason_closed": "closed at every time it could be reached",
    "reason_too_far_for_shift": "too far for a shift",
    "reason_no_certificate": "no inspector with the certificate",
    "reason_no_equipment": "equipment not available",
    "reason_crew_too_small": "crew too small",
    "reason_after_latest": "after its latest date",
    "reason_before_earliest": "before its earliest date",
    "reason_unreachable": "cannot be reached",
    "reason_hold_exceeded": "hold time exceeded",
    "reason_lodging_needed": "a night away is needed",
    "reason_no_working_time_left": "no working time left",
    "reason_load_limit": "load limit",
    "reason_not_found_by_search": "no place found by the search (not proven impossible)",
    # run sheet
    "arrive_latest": "arrive, latest",
    "latest_short": "latest {time}",
    "sheet_order": "No.",
    "sheet_site": "Site, address, access",
    "sheet_actual": "Actual",
    "sheet_done": "Done",
    "sheet_no_access": "No access, why:",
    "sheet_map": "Sketch of the tour",
    "sheet_space": "Write-up",
    "scale_metres": "{metres} m",
    "north": "N",
}

LANGUAGES: dict[str, dict[str, str]] = {
    "en": ENGLISH | OFFICE_ENGLISH | ROADS_ENGLISH,
    "es": SPANISH | OFFICE_SPANISH | ROADS_SPANISH,
}


@dataclass(frozen=True, slots=True)
class Words:
    """The catalogue of one language; call it with an id to get the text."""

    language: str
    texts: Mapping[str, str]

    def __call__(self, key: str, /, **values: object) -> str:
        """Return the text of ``key`` with its places filled.

        Raises
        ------
        KeyError
            The catalogue has no such id, or a place of the text was not given.
        """
        text = self.texts[key]
        return text.format(**values) if values else text

    def listed(self, key: str) -> list[str]:
        """Return the words of a text that is a list (days of the week, months)."""
        return self.texts[key].split()

    def for_scripts(self) -> dict[str, str]:
        """Return the words that scripts of a page use."""
        return {key: text for key, text in self.texts.items() if key.startswith("map_")}


def words_for(language: str) -> Words:
    """Return the catalogue of a language.

    Raises
    ------
    ValueError
        There is no catalogue for the language.
    """
    if language not in LANGUAGES:
        msg = (
            f"No words in language {language!r}; the pages speak {', '.join(sorted(LANGUAGES))}. "
            "Choose one of these."
        )
        raise ValueError(msg)
    return Words(language, LANGUAGES[language])
