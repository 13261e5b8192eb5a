"""Words of the office page in both languages; part of the catalogue of ``words``."""

from __future__ import annotations

__all__ = ["OFFICE_ENGLISH", "OFFICE_SPANISH"]

OFFICE_ENGLISH: dict[str, str] = {
    "office_page": "Office page",
    "to_figures": "Skip to the figures",
    "table_says_it": "The table below holds the same figures.",
    "with_unit": "{word}, {unit}",
    "per_cent": "{figure} %",
    "and_more": "and {count} more",
    "sum": "Sum",
    "yes": "yes",
    "no": "no",
    # not placed
    "left_by_reason": "Not placed, by reason",
    "visits": "Visits",
    "sites": "Sites",
    "left_note": "The overview gives the arithmetic behind each reason.",
    # weeks
    "weeks": "Capacity by week",
    "week": "Week",
    "week_name": "Week {week}: {first} to {last}",
    "week_figure": "due {due}, shifts {shift}",
    "due_visits": "Visits due",
    "due_hours": "Work due",
    "shifts": "Shifts",
    "shift_hours": "Shift hours",
    "short_so_far": "Short so far",
    "placed_hours": "Work placed",
    "weeks_plot": "For each week a frame as long as the hours of its shifts, a broken frame for "
    "overtime, and a solid bar for the work that falls due.",
    "weeks_short": "In a week marked short, more work has fallen due than shifts and overtime "
    "give.",
    "weeks_enough": "Week by week, shifts and overtime are not less than the work that falls due.",
    "weeks_note": "h:min. Work counts with access, shift hours less write-up; travel comes on top. "
    "What was due before the first date falls to the first week.",
    "weeks_rest": "In no week: visits without a due date: {without} ({without_hours}); visits "
    "due after the last date: {later} ({later_hours}).",
    # dates
    "dates": "Due dates and opening hours",
    "visited": "Visited",
    "days_late": "Days late",
    "past_due": "Visits placed after their due date: {count}; days late at worst: {days}.",
    "none_past_due": "Visits placed after their due date: none.",
    "overdue_before": "Visits overdue before the first date: {count}, of which not placed: {left}.",
    "left_due": "Visits due by the last date and not placed: {count}.",
    "past_latest": "Visits placed after their latest date: {count}.",
    "late_stops": "Stops late for opening hours: {count}, at worst by {minutes} min.",
    "none_late": "Stops late for opening hours: none.",
    # cost
    "cost_parts": "What it costs",
    "part": "Part",
    "quantity": "Quantity",
    "rate": "Price",
    "amount": "Amount",
    "cost_hours": "Paid hours",
    "cost_overtime": "Overtime",
    "cost_distance": "Distance",
    "cost_days": "Days opened",
    "rate_hours": "{money} an hour",
    "rate_overtime": "{money} an hour",
    "rate_distance": "{money} a km",
    "rate_days": "{money} a day",
    "cost_plot": "One bar for the whole cost, divided into paid hours, overtime, distance and days "
    "opened.",
    # stages
    "cost_by_stage": "Cost by stage",
    "stage": "After",
    "placed": "Placed",
    "change": "Change",
    "stage_split": "first split into days",
    "stage_order": "order within each day",
    "stage_days_together": "days together",
    "stages_plot": "For each stage a solid bar for the cost then, and an empty end for what is "
    "saved against the first split.",
    "stages_note": "The first split may run past the end of shifts; the last stage keeps every "
    "limit.",
    # hours
    "hours_spent": "Where the hours go",
    "spent_on": "Spent on",
    "hours": "Hours",
    "access": "Access",
    "travel_share": "Travel share",
    "travel_share_line": "Travel share {share}: drive / (drive + work + access). Wait is counted "
    "apart from drive.",
    "spent_plot": "One bar for all hours out, divided into work, access, drive, wait and write-up.",
    # balance
    "balance": "Balance of hours",
    "inspector": "Inspector",
    "days": "Days",
    "least": "Least",
    "median": "Median",
    "most": "Most",
    "spread": "Spread",
    "sum_hours": "Sum",
    "all_inspector_days": "All inspector-days",
    "per_inspector": "Sums of inspectors",
    "days_and_hours": "days: {count}, {hours}",
    "balance_plot": "A row for each inspector with a mark for each day at its hours, a line from "
    "the shortest to the longest day, and a tick at the median.",
    "balance_note": "h:min from leaving the base to the end of the write-up. Spread is most less "
    "least: it tells of the two ends only, so see the marks between.",
    # shape
    "shape": "Shape of the tours",
    "shape_mean": "Mean distance of stops to the centre of their day: {length}.",
    "shape_near": "Pairs of stops within {near} of each other on different days: {pairs}; stops "
    "concerned: {stops}.",
    "shape_crossing": "Tours that cross themselves: {count} of {tours}.",
    "to_centre": "Mean distance to centre",
    "crosses": "Crosses itself",
    "shape_note": "Measured on straight lines. With opening hours or on roads a tour that crosses "
    "itself can be the cheapest.",
    # exchange log
    "changes": "Exchange log in short",
    "within_day": "Within the day",
    "between_days": "With other days",
    "travel_first": "Travel cost at first",
    "travel_last": "Travel cost now",
    "changes_note": "Accepted exchanges since the first split. Travel cost is drive time and "
    "distance of the tour; it also moves with the visits a day takes in or gives away.",
    # origin
    "origin": "Where this plan comes from",
    "origin_plan": "Plan",
    "origin_issue": "Issue",
    "origin_version": "georoute version",
    "origin_register": "Register",
    "origin_register_hash": "SHA-256 of the register",
    "origin_programme_hash": "SHA-256 of the programme",
    "origin_seed": "Seed",
    "origin_effort": "Effort",
    "origin_seconds": "Limit in seconds",
    "no_limit": "none",
    "origin_stop_rule": "Search ended",
    "origin_travel": "Travel figures",
    "origin_note": "The same register, programme, seed, effort and version give the same plan, "
    "unless a limit in seconds ended the search.",
}

OFFICE_SPANISH: dict[str, str] = {
    "office_page": "Página de oficina",
    "to_figures": "Ir a las cifras",
    "table_says_it": "La tabla de abajo tiene las mismas cifras.",
    "with_unit": "{word}, {unit}",
    "per_cent": "{figure} %",
    "and_more": "y {count} más",
    "sum": "Suma",
    "yes": "sí",
    "no": "no",
    # not placed
    "left_by_reason": "Sin colocar, por motivo",
    "visits": "Visitas",
    "sites": "Sitios",
    "left_note": "La vista general da el cálculo de cada motivo.",
    # weeks
    "weeks": "Capacidad por semana",
    "week": "Semana",
    "week_name": "Semana {week}: {first} a {last}",
    "week_figure": "vence {due}, turnos {shift}",
    "due_visits": "Visitas que vencen",
    "due_hours": "Trabajo que vence",
    "shifts": "Turnos",
    "shift_hours": "Horas de turno",
    "short_so_far": "Falta acumulada",
    "placed_hours": "Trabajo colocado",
    "weeks_plot": "Por cada semana, un marco tan largo como las horas de sus turnos, un marco "
    "cortado para el sobretiempo y una barra llena para el trabajo que vence.",
    "weeks_short": "En una semana con falta ha vencido más trabajo que el que dan turnos y "
    "sobretiempo.",
    "weeks_enough": "Semana a semana, turnos y sobretiempo no son menos que el trabajo que vence.",
    "weeks_note": "h:min. El trabajo cuenta con su acceso, las horas de turno sin el informe; el "
    "viaje viene aparte. Lo vencido antes de la primera fecha cae en la primera semana.",
    "weeks_rest": "En ninguna semana: visitas sin vencimiento: {without} ({without_hours}); "
    "visitas que vencen después de la última fecha: {later} ({later_hours}).",
    # dates
    "dates": "Vencimientos y horarios",
    "visited": "Visitada",
    "days_late": "Días de atraso",
    "past_due": "Visitas colocadas después de su vencimiento: {count}; días de atraso, a lo "
    "peor: {days}.",
    "none_past_due": "Visitas colocadas después de su vencimiento: ninguna.",
    "overdue_before": "Visitas vencidas antes de la primera fecha: {count}, de ellas sin "
    "colocar: {left}.",
    "left_due": "Visitas que vencen hasta la última fecha y están sin colocar: {count}.",
    "past_latest": "Visitas colocadas después de su última fecha: {count}.",
    "late_stops": "Paradas tarde para su horario: {count}, a lo peor por {minutes} min.",
    "none_late": "Paradas tarde para su horario: ninguna.",
    # cost
    "cost_parts": "Lo que cuesta",
    "part": "Parte",
    "quantity": "Cantidad",
    "rate": "Precio",
    "amount": "Monto",
    "cost_hours": "Horas pagadas",
    "cost_overtime": "Sobretiempo",
    "cost_distance": "Distancia",
    "cost_days": "Días abiertos",
    "rate_hours": "{money} por hora",
    "rate_overtime": "{money} por hora",
    "rate_distance": "{money} por km",
    "rate_days": "{money} por día",
    "cost_plot": "Una barra para el costo entero, dividida en horas pagadas, sobretiempo, "
    "distancia y días abiertos.",
    # stages
    "cost_by_stage": "Costo por etapa",
    "stage": "Después de",
    "placed": "Colocadas",
    "change": "Cambio",
    "stage_split": "primer reparto en días",
    "stage_order": "orden dentro de cada día",
    "stage_days_together": "días en conjunto",
    "stages_plot": "Por cada etapa, una barra llena para el costo de entonces y un final vacío "
    "para lo ahorrado frente al primer reparto.",
    "stages_note": "El primer reparto puede pasar el fin de los turnos; la última etapa respeta "
    "todos los límites.",
    # hours
    "hours_spent": "A dónde van las horas",
    "spent_on": "Dedicadas a",
    "hours": "Horas",
    "access": "Acceso",
    "travel_share": "Proporción de viaje",
    "travel_share_line": "Proporción de viaje {share}: manejo / (manejo + trabajo + acceso). La "
    "espera se cuenta aparte del manejo.",
    "spent_plot": "Una barra para todas las horas fuera, dividida en trabajo, acceso, manejo, "
    "espera e informe.",
    # balance
    "balance": "Equilibrio de horas",
    "inspector": "Inspector",
    "days": "Días",
    "least": "Mínimo",
    "median": "Mediana",
    "most": "Máximo",
    "spread": "Dispersión",
    "sum_hours": "Suma",
    "all_inspector_days": "Todos los días de inspector",
    "per_inspector": "Sumas de inspectores",
    "days_and_hours": "días: {count}, {hours}",
    "balance_plot": "Una fila por inspector con una marca por día en sus horas, una línea del día "
    "más corto al más largo y una raya en la mediana.",
    "balance_note": "h:min desde la salida de la base hasta el fin del informe. La dispersión es "
    "el máximo menos el mínimo: habla solo de los dos extremos; vea las marcas entre ellos.",
    # shape
    "shape": "Forma de los recorridos",
    "shape_mean": "Distancia media de las paradas al centro de su día: {length}.",
    "shape_near": "Pares de paradas a menos de {near} entre sí en días distintos: {pairs}; "
    "paradas en ellos: {stops}.",
    "shape_crossing": "Recorridos que se cruzan a sí mismos: {count} de {tours}.",
    "to_centre": "Distancia media al centro",
    "crosses": "Se cruza",
    "shape_note": "Medido en líneas rectas. Con horarios o por calles, un recorrido que se cruza "
    "puede ser el más barato.",
    # exchange log
    "changes": "Registro de intercambios en breve",
    "within_day": "Dentro del día",
    "between_days": "Con otros días",
    "travel_first": "Costo de viaje al inicio",
    "travel_last": "Costo de viaje ahora",
    "changes_note": "Intercambios aceptados desde el primer reparto. El costo de viaje es el "
    "tiempo de manejo y la distancia del recorrido; cambia también con las visitas que un día "
    "recibe o entrega.",
    # origin
    "origin": "De dónde viene este plan",
    "origin_plan": "Plan",
    "origin_issue": "Emisión",
    "origin_version": "Versión de georoute",
    "origin_register": "Registro",
    "origin_register_hash": "SHA-256 del registro",
    "origin_programme_hash": "SHA-256 del programa",
    "origin_seed": "Semilla",
    "origin_effort": "Esfuerzo",
    "origin_seconds": "Límite en segundos",
    "no_limit": "ninguno",
    "origin_stop_rule": "Fin de la búsqueda",
    "origin_travel": "Cifras de viaje",
    "origin_note": "El mismo registro, programa, semilla, esfuerzo y versión dan el mismo plan, "
    "salvo que un límite en segundos haya terminado la búsqueda.",
}
