"""Figures of a report as vector drawings, told apart by dashes, markers and words: they print without colour."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from itertools import pairwise

from reportlab.graphics.shapes import Circle, Drawing, Line, Path, Polygon, PolyLine, Rect, String
from reportlab.lib.colors import Color, HexColor, white
from reportlab.pdfbase.pdfmetrics import stringWidth

from engine.report.blocks import Bundle, Chart, DoublePipeScheme, Figure, Flow, ShellScheme, Strip
from engine.stated import Side

REGULAR, BOLD = "DejaVuSans", "DejaVuSans-Bold"
INK, GREY, PALE, HAIR = HexColor("#1b2430"), HexColor("#5f6b78"), HexColor("#d5dade"), HexColor("#aab2ba")
SMALL = 7.0

REGIME_FILL = {"laminar": white, "transitional": HexColor("#e3e6e9"), "turbulent": HexColor("#c3c9cf")}


def fitted(text: str, room: float, size: float = SMALL, font: str = REGULAR) -> str:
    """The text, cut with an ellipsis where it is wider than the room [pt]."""
    if stringWidth(text, font, size) <= room:
        return text
    while text and stringWidth(text + "…", font, size) > room:
        text = text[:-1]
    return text.rstrip() + "…"


def _text(x: float, y: float, text: str, *, anchor: str = "start", bold: bool = False, size: float = SMALL) -> String:
    return String(x, y, text, fontName=BOLD if bold else REGULAR, fontSize=size, textAnchor=anchor, fillColor=INK)


def _arrow(x: float, y: float, dx: int, dy: int, size: float = 5.0) -> Polygon:
    """A filled arrow head whose tip is at (x, y), pointing along one axis."""
    back, half = size, size * 0.45
    base = (x - dx * back, y - dy * back)
    a = (base[0] - dy * half, base[1] - dx * half)
    b = (base[0] + dy * half, base[1] + dx * half)
    return Polygon([x, y, *a, *b], fillColor=INK, strokeColor=None)


# --- chart ------------------------------------------------------------------------------------------------------------


QUARTERS = (0.0, 0.25, 0.5, 0.75, 1.0)


def ticks(low: float, high: float, most: int = 6) -> list[float]:
    """Round figures that span low to high, at most about so many."""
    span = max(high - low, 1e-9)
    raw = span / most
    power = 10.0 ** math.floor(math.log10(raw))
    step = next(m * power for m in (1, 2, 2.5, 5, 10) if m * power >= raw * (1 - 1e-9))
    first, last = math.floor(low / step + 1e-9), math.ceil(high / step - 1e-9)
    return [i * step for i in range(first, max(last, first + 1) + 1)]


def draw_chart(chart: Chart, width: float, height: float = 140.0) -> Drawing:
    """The lines over their axes, a legend above, the strips below."""
    drawing = Drawing(width, height)
    strip_height = 11.0
    left, right, top = 44.0, 10.0, 18.0
    bottom = 25.0 + strip_height * len(chart.strips) + (4.0 if chart.strips else 0.0)
    values = [y for line in chart.lines for y in line.y]
    y_ticks = ticks(min(values), max(values))
    y_low, y_high = y_ticks[0], y_ticks[-1]
    inner_width, inner_height = width - left - right, height - bottom - top

    def px(x: float) -> float:
        return left + inner_width * x

    def py(y: float) -> float:
        return bottom + inner_height * (y - y_low) / (y_high - y_low)

    for mark in chart.marks:
        drawing.add(Line(px(mark), bottom, px(mark), bottom + inner_height, strokeColor=PALE, strokeWidth=0.4))
    for y in y_ticks:
        drawing.add(Line(left, py(y), width - right, py(y), strokeColor=PALE, strokeWidth=0.5))
        drawing.add(_text(left - 4, py(y) - 2.5, f"{y:g}", anchor="end"))
    drawing.add(Rect(left, bottom, inner_width, inner_height, fillColor=None, strokeColor=HAIR, strokeWidth=0.6))
    for x in QUARTERS:
        drawing.add(Line(px(x), bottom, px(x), bottom - 3, strokeColor=HAIR, strokeWidth=0.6))
    for i, strip in enumerate(chart.strips):
        _draw_strip(drawing, strip, px, bottom - 5 - strip_height * (i + 1), strip_height - 2)
    base = bottom - 5 - strip_height * len(chart.strips)
    for x in QUARTERS:
        drawing.add(_text(px(x), base - 8, f"{x:g}", anchor="middle"))
    drawing.add(_text(left + inner_width / 2, base - 18, chart.x_label, anchor="middle"))
    drawing.add(_text(0, height - 8, chart.y_label, bold=True))
    at = left + 70.0
    for line in chart.lines:
        xy = [(px(x), py(y)) for x, y in zip(chart.x, line.y, strict=True)]
        drawing.add(_polyline(xy, line.dash))
        for x, y in xy[:: max(len(xy) // 8, 1)]:
            _mark(drawing, x, y, line.marker)
        drawing.add(_polyline([(at, height - 5.5), (at + 20, height - 5.5)], line.dash))
        _mark(drawing, at + 10, height - 5.5, line.marker)
        drawing.add(_text(at + 24, height - 8, line.name))
        at += 36 + stringWidth(line.name, REGULAR, SMALL)
    return drawing


def _polyline(points: Sequence[tuple[float, float]], dash: Sequence[float]) -> PolyLine:
    line = PolyLine([c for point in points for c in point], strokeColor=INK, strokeWidth=1.0)
    if dash:
        line.strokeDashArray = list(dash)
    return line


def _mark(drawing: Drawing, x: float, y: float, marker: str) -> None:
    if marker == "full circle":
        drawing.add(Circle(x, y, 2.0, fillColor=INK, strokeColor=INK, strokeWidth=0.6))
    elif marker == "open square":
        drawing.add(Rect(x - 1.9, y - 1.9, 3.8, 3.8, fillColor=white, strokeColor=INK, strokeWidth=0.8))


def _draw_strip(drawing: Drawing, strip: Strip, px: Callable[[float], float], y: float, height: float) -> None:
    drawing.add(_text(px(0.0) - 4, y + 2, fitted(strip.name, px(0.0) - 4), anchor="end"))
    for start, end, what in strip.runs:
        x, w = px(start), px(end) - px(start)
        fill = REGIME_FILL.get(what, white)
        drawing.add(Rect(x, y, w, height, fillColor=fill, strokeColor=HAIR, strokeWidth=0.4))
        if stringWidth(what, REGULAR, SMALL) < w - 4:
            drawing.add(_text(x + w / 2, y + 2, what, anchor="middle"))


# --- scheme -----------------------------------------------------------------------------------------------------------

MOST_LEGS = 6
LEG, PIPE, PITCH = 16.0, 6.0, 26.0
ENDS, BANKS = 128.0, 150.0
"""Room for the words beside the legs, and for the sketch of the banks."""


def draw_double_pipe(scheme: DoublePipeScheme, width: float) -> Drawing:
    """One bank of the double pipe leg by leg, and how the banks are fed."""
    legs = shown_legs(scheme.legs)
    several = scheme.banks > 1
    x0 = ENDS
    limit = width - BANKS if several else width
    x1 = limit - ENDS + (24.0 if several else 0.0)
    height = max(PITCH * len(legs) + 28.0, 104.0 if several else 0.0)
    top = height - 20.0 - LEG / 2
    drawing = Drawing(width, height)
    inner_fill, outer_fill = (PALE, white) if scheme.flows["inside"].hot else (white, PALE)
    rows = [(leg, top - PITCH * i) for i, leg in enumerate(legs)]
    _annulus(drawing, rows, x0, x1, outer_fill)
    _inner_pipe(drawing, rows, x0, x1, inner_fill)
    _arrows_in_legs(drawing, rows, x0, x1, scheme.counter)
    _ends(drawing, scheme, rows, x0, x1, limit)
    if several:
        _banks(drawing, scheme, width - BANKS / 2, height)
    return drawing


def shown_legs(legs: int) -> list[int]:
    """Numbers of the legs to draw: all, or the first and the last few with an even number left out between."""
    if legs <= MOST_LEGS:
        return list(range(legs))
    head = 2 + legs % 2
    return [*range(head), legs - 2, legs - 1]


def _turns(rows: list[tuple[int, float]]) -> list[tuple[float, float, bool, int]]:
    """Between successive drawn legs: height above and below, whether at the right end, and the legs left out."""
    return [(y, below, leg % 2 == 0, after - leg - 1) for (leg, y), (after, below) in pairwise(rows)]


def _pipe(along: Callable[[Path], None], width: float, fill: Color) -> list[Path]:
    """A line drawn as a pipe: its walls, then its content over them."""
    paths = []
    for stroke, colour in ((width, INK), (width - 1.4, fill)):
        path = Path(fillColor=None, strokeColor=colour, strokeWidth=stroke)
        path.strokeLineJoin, path.strokeLineCap = 1, 0
        along(path)
        paths.append(path)
    return paths


def _annulus(drawing: Drawing, rows: list[tuple[int, float]], x0: float, x1: float, fill: Color) -> None:
    for y, below, at_right, _ in _turns(rows):
        x = x1 - 14 if at_right else x0 + 14

        def jumper(path: Path, x: float = x, y: float = y, below: float = below) -> None:
            path.moveTo(x, y)
            path.lineTo(x, below)

        for part in _pipe(jumper, 7.0, fill):
            drawing.add(part)
    for _, y in rows:
        drawing.add(Rect(x0, y - LEG / 2, x1 - x0, LEG, fillColor=fill, strokeColor=INK, strokeWidth=0.7))


def _inner_pipe(drawing: Drawing, rows: list[tuple[int, float]], x0: float, x1: float, fill: Color) -> None:
    reach = 12.0

    def serpentine(path: Path) -> None:
        first = rows[0][1]
        path.moveTo(x0 - 22, first)
        path.lineTo(x1 + reach, first)
        for y, below, at_right, _ in _turns(rows):
            x, bulge = (x1 + reach, 14.0) if at_right else (x0 - reach, -14.0)
            path.lineTo(x, y)
            path.curveTo(x + bulge, y, x + bulge, below, x, below)
            path.lineTo(x0 - reach if at_right else x1 + reach, below)
        leg, y = rows[-1]
        path.lineTo(x1 + 22 if leg % 2 == 0 else x0 - 22, y)

    for part in _pipe(serpentine, PIPE, fill):
        drawing.add(part)
    for y, below, _, left_out in _turns(rows):
        if left_out:
            words = f"{left_out} more legs"
            x = (x0 + x1) / 2
            drawing.add(_text(x, (y + below) / 2 - 2.5, words, anchor="middle"))
            for offset in (-0.35, 0.35):
                x_dots = x + offset * (x1 - x0)
                line = Line(x_dots, y - LEG / 2 - 1, x_dots, below + LEG / 2 + 1, strokeColor=GREY, strokeWidth=1.0)
                line.strokeDashArray = [1, 2]
                drawing.add(line)


def _arrows_in_legs(drawing: Drawing, rows: list[tuple[int, float]], x0: float, x1: float, counter: bool) -> None:
    for leg, y in rows:
        way = 1 if leg % 2 == 0 else -1
        outer = -way if counter else way
        drawing.add(_arrow((x0 + x1) / 2 + 3 * way, y, way, 0, 6.0))
        for offset in (-0.22, 0.22):
            x = (x0 + x1) / 2 + offset * (x1 - x0)
            for gap in (-1, 1):
                drawing.add(_arrow(x + 2 * outer, y + gap * (LEG + PIPE) / 4, outer, 0, 4.0))


def _ends(
    drawing: Drawing, scheme: DoublePipeScheme, rows: list[tuple[int, float]], x0: float, x1: float, limit: float
) -> None:
    inside, outside = scheme.flows["inside"], scheme.flows["outside"]
    first, (last_leg, last) = rows[0][1], rows[-1]
    last_at_right = last_leg % 2 == 0
    drawing.add(_arrow(x0 - 21, first, 1, 0, 7.0))
    _label(drawing, x0 - 34, first + 19, "end", _told(inside, "in"))
    tip = x1 + 29 if last_at_right else x0 - 29
    drawing.add(_arrow(tip, last, 1 if last_at_right else -1, 0, 7.0))
    x = x1 + 34 if last_at_right else x0 - 34
    _label(drawing, x, last - 2, "start" if last_at_right else "end", [f"{inside.name} out {inside.T_out}"])
    # In counter flow the outside fluid leaves where the inside fluid enters.
    upper_in = not scheme.counter
    x_up, x_down = x0 + 14, x1 - 14 if last_at_right else x0 + 14
    for x, edge, up, enters in ((x_up, first + LEG / 2, 1, upper_in), (x_down, last - LEG / 2, -1, not upper_in)):
        far = edge + up * 13
        drawing.add(Line(x, edge, x, far, strokeColor=INK, strokeWidth=1.2))
        drawing.add(_arrow(x, edge if enters else far + up * 4, 0, -up if enters else up, 6.0))
        words = ", ".join(_told(outside, "in")) if enters else f"{outside.name} out {outside.T_out}"
        anchor = "end" if x > (x0 + x1) / 2 else "start"
        room = limit - x - 12 if anchor == "start" else x - 12
        drawing.add(
            _text(x + (8 if anchor == "start" else -8), edge + up * 9 - 2.5, fitted(words, room), anchor=anchor)
        )


def _told(flow: Flow, end: str) -> list[str]:
    return [f"{flow.name} ({'hot' if flow.hot else 'cold'})", flow.fluid, flow.flow, f"{end} {flow.T_in}"]


def _label(drawing: Drawing, x: float, y: float, anchor: str, lines: list[str]) -> None:
    for i, line in enumerate(lines):
        drawing.add(_text(x, y - 8.5 * i, fitted(line, 96.0), anchor=anchor))


def _banks(drawing: Drawing, scheme: DoublePipeScheme, middle: float, height: float) -> None:
    """Boxes for the banks, the inside fluid's way on their left, the outside fluid's on their right."""
    shown = min(scheme.banks, 3)
    box_width, box_height, pitch = 56.0, 14.0, 20.0
    x, top = middle - box_width / 2, height - 24.0
    drawing.add(_text(middle, height - 10, f"{scheme.banks} banks", anchor="middle", bold=True))
    levels = [top - pitch * i - box_height / 2 for i in range(shown)]
    for i, y in enumerate(levels):
        last = i == shown - 1
        number = scheme.banks if last else i + 1
        words = f"{'… ' if last and scheme.banks > shown else ''}bank {number}"
        drawing.add(Rect(x, y - box_height / 2, box_width, box_height, fillColor=white, strokeColor=INK))
        drawing.add(_text(middle, y - 2.5, words, anchor="middle"))
    sides: tuple[tuple[Side, float, int], ...] = (("inside", x, -1), ("outside", x + box_width, 1))
    for side, edge, way in sides:
        rail, flow = edge + 16 * way, scheme.flows[side]
        drawing.add(Line(rail, levels[0] + (10 if flow.split else 0), rail, levels[-1], strokeColor=INK))
        for i, y in enumerate(levels):
            drawing.add(Line(rail, y, edge, y, strokeColor=INK))
            if flow.split or i == 0:
                drawing.add(_arrow(edge, y, -way, 0))
            if not flow.split and i:
                drawing.add(_arrow(rail, y, 0, -1))
        below = levels[-1] - box_height / 2
        drawing.add(_text(rail, below - 9, fitted(flow.name, BANKS / 2 - 4), anchor="middle"))
        drawing.add(_text(rail, below - 18, "split" if flow.split else "in turn", anchor="middle"))


# --- shell ------------------------------------------------------------------------------------------------------------

MOST_PASSES, MOST_BAFFLES = 4, 9


def draw_shell(scheme: ShellScheme, width: float) -> Drawing:
    """One shell with its nozzles, baffles and tube passes; many passes are told by a few of them."""
    height, x0, x1, head = 132.0, 128.0, width - 128.0, 26.0
    bottom, top = 34.0, 98.0
    drawing = Drawing(width, height)
    inside, outside = scheme.flows["inside"], scheme.flows["outside"]
    drawing.add(Rect(x0, bottom, x1 - x0, top - bottom, fillColor=PALE if outside.hot else white, strokeColor=INK))
    for x in (x0 - head, x1):
        drawing.add(Rect(x, bottom, head, top - bottom, rx=8, fillColor=white, strokeColor=INK))
    _baffles(drawing, scheme, x0, x1, bottom, top)
    passes = scheme.tube_passes
    drawn_passes = passes if passes <= MOST_PASSES else MOST_PASSES - passes % 2
    levels = [top - (top - bottom) * (i + 0.5) / drawn_passes for i in range(drawn_passes)]
    for i, y in enumerate(levels):
        way = 1 if i % 2 == 0 else -1
        drawing.add(Line(x0 - head / 2, y, x1 + head / 2, y, strokeColor=INK, strokeWidth=1.6))
        drawing.add(_arrow((x0 + x1) / 2 + 6 * way, y, way, 0, 7.0))
        if i + 1 < drawn_passes:
            x = x1 + head / 2 if way > 0 else x0 - head / 2
            drawing.add(Line(x, y, x, levels[i + 1], strokeColor=INK, strokeWidth=1.6))
    told = [f"{passes} tube {'pass' if passes == 1 else 'passes'}{', U-tubes' if scheme.u_tubes else ''}"]
    if scheme.shells_in_series > 1 or scheme.shells_in_parallel > 1:
        told.append(f"{scheme.shells_in_series} in series, {scheme.shells_in_parallel} in parallel")
    _label(drawing, x1 + head + 6, top - 8, "start", told)
    first, last, out_right = levels[0], levels[-1], drawn_passes % 2 == 1
    drawing.add(_arrow(x0 - head, first, 1, 0, 7.0))
    _label(drawing, x0 - head - 10, top + 16, "end", _told(inside, "in"))
    drawing.add(_arrow(x1 + head + 7 if out_right else x0 - head - 7, last, 1 if out_right else -1, 0, 7.0))
    x = x1 + head + 12 if out_right else x0 - head - 12
    _label(drawing, x, last - 2, "start" if out_right else "end", [f"{inside.name} out {inside.T_out}"])
    _shell_nozzles(drawing, scheme, outside, x0, x1, bottom, top)
    return drawing


def _baffles(drawing: Drawing, scheme: ShellScheme, x0: float, x1: float, bottom: float, top: float) -> None:
    shown = min(scheme.baffles, MOST_BAFFLES)
    cut = 0.25 * (top - bottom)
    for i in range(shown):
        x = x0 + (x1 - x0) * (i + 1) / (shown + 1)
        low, high = (bottom + cut, top) if i % 2 else (bottom, top - cut)
        drawing.add(Line(x, low, x, high, strokeColor=GREY, strokeWidth=0.9))
    if scheme.letter in "FGH":
        inset = (x1 - x0) * 0.08
        starts = {"F": (0.0, inset), "G": (inset, inset), "H": (inset, inset)}[scheme.letter]
        middle = (bottom + top) / 2
        drawing.add(Line(x0 + starts[0], middle, x1 - starts[1], middle, strokeColor=GREY, strokeWidth=1.4))


def _shell_nozzles(
    drawing: Drawing, scheme: ShellScheme, flow: Flow, x0: float, x1: float, bottom: float, top: float
) -> None:
    """Inlets above and outlets below the shell, at the places that the shell's letter gives them."""
    right, left, middle = 0.95, 0.05, 0.5
    far, near = (right, left) if scheme.first_pass_counter else (left, right)
    places: dict[str, tuple[tuple[float, ...], tuple[float, ...]]] = {
        "E": ((far,), (near,)),
        "F": ((left,), (left,)),
        "G": ((middle,), (middle,)),
        "H": ((0.25, 0.75), (0.25, 0.75)),
        "J": ((middle,), (left, right)),
        "X": ((0.2, middle, 0.8), (0.2, middle, 0.8)),
    }
    entries, exits = places[scheme.letter]
    for share in entries:
        x = x0 + (x1 - x0) * share
        drawing.add(Line(x, top, x, top + 14, strokeColor=INK, strokeWidth=1.2))
        drawing.add(_arrow(x, top, 0, -1, 6.0))
    for share in exits:
        x = x0 + (x1 - x0) * share
        drawing.add(Line(x, bottom, x, bottom - 10, strokeColor=INK, strokeWidth=1.2))
        drawing.add(_arrow(x, bottom - 15, 0, -1, 6.0))
    for share, y, words in (
        (entries[0], top + 18, ", ".join(_told(flow, "in"))),
        (exits[0], bottom - 24, f"{flow.name} out {flow.T_out}"),
    ):
        anchor = "end" if share > 0.5 else "start" if share < 0.5 else "middle"
        drawing.add(_text(x0 + (x1 - x0) * share, y, fitted(words, x1 - x0), anchor=anchor))


# --- bundle -----------------------------------------------------------------------------------------------------------

HALF = 0.5523
"""Handle of the cubic that draws a quarter of a circle, over the radius."""


def draw_bundle(bundle: Bundle, width: float, height: float = 150.0) -> Drawing:
    """The tubes to scale within shell and outer tube limit; even passes are grey, each pass carries its number."""
    field, drawing = bundle.field, Drawing(width, height)
    scale = (height / 2 - 3) / field.shell_radius
    x0, y0 = 24.0 + height / 2, height / 2

    def circle(radius: float, **style: object) -> Circle:
        return Circle(x0, y0, radius * scale, fillColor=None, strokeColor=INK, **style)

    drawing.add(circle(field.shell_radius, strokeWidth=1.4))
    drawing.add(circle(field.bundle_radius, strokeWidth=0.4, strokeDashArray=[1, 2]))
    places = list(zip(x0 + scale * field.x, y0 + scale * field.y, field.tube_pass, strict=True))
    for even, fill in ((False, white), (True, HexColor("#9aa3ab"))):
        path = Path(fillColor=fill, strokeColor=INK, strokeWidth=0.3)
        for x, y, number in places:
            if (number % 2 == 0) == even:
                _add_circle(path, x, y, field.tube_od * scale / 2)
        drawing.add(path)
    if field.cut_y is not None:
        half = math.sqrt(field.shell_radius**2 - field.cut_y**2) * scale
        for y, dash in ((field.cut_y, None), (-field.cut_y, [5, 3])):
            level = y0 + y * scale
            drawing.add(
                Line(x0 - half, level, x0 + half, level, strokeColor=INK, strokeWidth=1.2, strokeDashArray=dash)
            )
    for y in field.strip_y:
        inner, outer = (math.sqrt(r**2 - y**2) * scale for r in (field.bundle_radius, field.shell_radius))
        level = y0 + y * scale
        for way in (-1, 1):
            drawing.add(Line(x0 + way * inner, level, x0 + way * outer, level, strokeColor=INK, strokeWidth=2))
    passes = int(field.tube_pass.max()) if len(places) else 0
    for number in range(1, passes + 1) if passes > 1 else ():
        of_pass = [(x, y) for x, y, one in places if one == number]
        if of_pass:
            x, y = (sum(values) / len(of_pass) for values in zip(*of_pass, strict=True))
            drawing.add(Rect(x - 6, y - 5, 12, 10, rx=3, fillColor=white, strokeColor=INK, strokeWidth=0.5))
            drawing.add(_text(x, y - 2.6, str(number), anchor="middle", bold=True))
    left = x0 + height / 2 + 26
    for i, words in enumerate(bundle.legend):
        drawing.add(_text(left, height - 22 - 11 * i, fitted(words, width - left)))
    return drawing


def _add_circle(path: Path, x: float, y: float, r: float) -> None:
    h = HALF * r
    path.moveTo(x + r, y)
    path.curveTo(x + r, y + h, x + h, y + r, x, y + r)
    path.curveTo(x - h, y + r, x - r, y + h, x - r, y)
    path.curveTo(x - r, y - h, x - h, y - r, x, y - r)
    path.curveTo(x + h, y - r, x + r, y - h, x + r, y)
    path.closePath()


def drawn(figure: Figure, width: float) -> Drawing:
    """Any figure of a report."""
    if isinstance(figure, Chart):
        return draw_chart(figure, width)
    if isinstance(figure, ShellScheme):
        return draw_shell(figure, width)
    if isinstance(figure, Bundle):
        return draw_bundle(figure, width)
    return draw_double_pipe(figure, width)
