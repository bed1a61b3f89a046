"""plotly figures from results. Knows no streamlit.

Dashes, markers and hatches tell apart what colours tell apart; every colour is readable on light and on dark ground.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import plotly.graph_objects as go
from plotly.subplots import make_subplots

HOT, COLD, WALL = "#d1603d", "#3d8fc4", "#8b9196"
PALETTE = (HOT, WALL, "#a9afb3", COLD)
HATCHES = {"laminar": "", "transitional": "/", "turbulent": "x", "condensing": "-"}
PART_HATCHES = ("", "/", "x", "-", ".", "\\", "+")
PART_COLOURS = ("#4f8a8b", "#b08d57", "#7d6b91", "#8b9196", "#a65e5e", "#5f8d4e", "#5b7db1")
GROUND = "rgba(128,136,140,0.30)"
STRIP = "rgba(128,136,140,0.12)"
MARKERS = {"full circle": "circle", "open square": "square-open"}


def chart(data: Any) -> go.Figure:
    """Lines over a common x, with strips below that say what holds where."""
    figure = go.Figure()
    room = 0.09 * len(data.strips)
    for line, colour in zip(data.lines, PALETTE, strict=False):
        marked = bool(line.marker)
        figure.add_scatter(
            x=data.x,
            y=line.y,
            name=line.name,
            mode="lines+markers" if marked else "lines",
            line={"color": colour, "width": 2.5 if marked else 1.8, "dash": _dash(line.dash)},
            marker={"symbol": MARKERS.get(line.marker, "circle"), "size": 6},
            hovertemplate="%{y:.1f}",
        )
    for strip in data.strips:
        for i, (start, end, what) in enumerate(strip.runs):
            figure.add_bar(
                x=[end - start],
                base=[start],
                y=[strip.name],
                orientation="h",
                yaxis="y2",
                width=0.82,
                marker={
                    "color": STRIP,
                    "line": {"color": WALL, "width": 1},
                    "pattern": {"shape": HATCHES.get(what, ""), "fgcolor": WALL, "size": 12, "solidity": 0.05},
                },
                showlegend=False,
                hovertemplate=f"{strip.name}: {what}<extra></extra>",
            )
            if end - start > 0.2:
                # As an annotation the words take the ink of the page, whichever its ground.
                said = f"{strip.name}: {what}" if i == 0 and end - start > 0.4 else what
                middle = 0.5 * (start + end)
                figure.add_annotation(x=middle, y=strip.name, yref="y2", text=said, showarrow=False, font={"size": 12})
    for mark in data.marks:
        figure.add_vline(x=mark, line={"color": WALL, "width": 0.6, "dash": "dot"}, opacity=0.5)
    figure.update_layout(
        xaxis={
            "title": data.x_label,
            "range": [0, 1],
            "tickvals": [0, 0.25, 0.5, 0.75, 1],
            "ticktext": ["0", "25 %", "50 %", "75 %", "100 %"],
            "anchor": "y2",
        },
        yaxis={"title": data.y_label, "domain": [room + 0.03 if room else 0, 1]},
        yaxis2={"domain": [0, room or 0.01], "showticklabels": False, "showgrid": False, "fixedrange": True},
        hovermode="x unified",
        barmode="overlay",
        **_frame(430),
    )
    return figure


def _dash(dashes: Sequence[float]) -> str:
    return ",".join(f"{2 * dash:g}px" for dash in dashes) if dashes else "solid"


def _frame(height: int) -> dict[str, Any]:
    return {
        "height": height,
        "margin": {"l": 8, "r": 26, "t": 8, "b": 8},
        "legend": {"orientation": "h", "yanchor": "bottom", "y": 1.01, "x": 0},
        "dragmode": False,
    }


def shares(names: Sequence[str], parts: Sequence[float]) -> go.Figure:
    """How a whole is made up, one bar a part, in the order of the parts."""
    whole = sum(parts)
    figure = go.Figure(
        go.Bar(
            x=[100 * part / whole for part in parts],
            y=list(names),
            orientation="h",
            marker={"color": [HOT if part == max(parts) else WALL for part in parts]},
            text=[f"{100 * part / whole:.0f} %" for part in parts],
            textposition="outside",
            cliponaxis=False,
            hovertemplate="%{y}: %{x:.1f} %<extra></extra>",
        )
    )
    figure.update_layout(
        xaxis={"title": "Share of the whole resistance, %", "range": [0, 112]},
        yaxis={"autorange": "reversed"},
        **_frame(270),
    )
    return figure


def stacked(
    names: Sequence[str], parts: Mapping[str, Sequence[float]], allowed: Sequence[float | None], unit: str
) -> go.Figure:
    """One bar a name, made up of parts, with a mark where the allowed value lies."""
    figure = go.Figure()
    for i, (part, values) in enumerate(parts.items()):
        figure.add_bar(
            x=list(values),
            y=list(names),
            name=part,
            orientation="h",
            marker={
                "color": PART_COLOURS[i % len(PART_COLOURS)],
                "pattern": {"shape": PART_HATCHES[i % len(PART_HATCHES)], "size": 7, "solidity": 0.25},
            },
            hovertemplate=f"{part}: %{{x:.3g}} {unit}<extra></extra>",
        )
    stated = [(name, limit) for name, limit in zip(names, allowed, strict=True) if limit is not None]
    if stated:
        figure.add_scatter(
            x=[limit for _, limit in stated],
            y=[name for name, _ in stated],
            name="Allowed",
            mode="markers",
            marker={"symbol": "line-ns", "size": 34, "line": {"width": 3, "color": HOT}},
            hovertemplate=f"Allowed: %{{x:.3g}} {unit}<extra></extra>",
        )
    figure.update_layout(
        barmode="stack",
        xaxis={"title": f"Pressure drop, {unit}", "rangemode": "tozero"},
        yaxis={"autorange": "reversed"},
        **_frame(270),
    )
    return figure


def bundle(data: Any) -> go.Figure:
    """The cross-section of a bundle to scale; the tubes of even passes are filled, each pass carries its number."""
    field, figure = data.field, go.Figure()
    turn = np.linspace(0, 2 * np.pi, 13 if len(field.x) < 1500 else 7)
    ring = 0.5 * field.tube_od * np.array([[*np.cos(turn), np.nan], [*np.sin(turn), np.nan]])
    for even in (False, True):
        here = (field.tube_pass % 2 == 0) == even
        x, y = ((at[here, None] + edge).ravel() for at, edge in zip((field.x, field.y), ring, strict=True))
        figure.add_scatter(
            x=x.round(5),
            y=y.round(5),
            mode="lines",
            fill="toself",
            fillcolor=GROUND.replace("0.30", "0.75") if even else "rgba(0,0,0,0)",
            line={"color": WALL, "width": 1},
        )
    turn = np.linspace(0, 2 * np.pi, 121)
    for radius, dash, width in ((field.shell_radius, "solid", 2.5), (field.bundle_radius, "dot", 1)):
        line = {"color": WALL, "width": width, "dash": dash}
        figure.add_scatter(x=radius * np.cos(turn), y=radius * np.sin(turn), mode="lines", line=line)
    chords = [] if field.cut_y is None else [(field.cut_y, "solid"), (-field.cut_y, "dash")]
    for y, dash in chords:
        half = (field.shell_radius**2 - y**2) ** 0.5
        figure.add_scatter(x=[-half, half], y=[y, y], mode="lines", line={"color": HOT, "width": 2, "dash": dash})
    for y in field.strip_y:
        ends = [(radius**2 - y**2) ** 0.5 for radius in (field.bundle_radius, field.shell_radius)]
        x = [-ends[1], -ends[0], None, *ends]
        figure.add_scatter(x=x, y=[y] * 5, mode="lines", line={"color": HOT, "width": 4})
    for number in np.unique(field.tube_pass) if field.tube_pass.max() > 1 else ():
        here = field.tube_pass == number
        figure.add_annotation(
            x=field.x[here].mean(),
            y=field.y[here].mean(),
            text=f"<b>{number}</b>",
            showarrow=False,
            font={"color": "#1b2430"},
            bgcolor="white",
            bordercolor=WALL,
        )
    hidden = {"visible": False, "fixedrange": True, "range": [-1.02 * field.shell_radius, 1.02 * field.shell_radius]}
    figure.update_traces(hoverinfo="skip", showlegend=False)
    frame = {**_frame(270), "margin": dict.fromkeys("lrtb", 2)}
    figure.update_layout(xaxis=hidden, yaxis={**hidden, "scaleanchor": "x"}, **frame)
    return figure


@dataclass(frozen=True)
class Swept:
    """One line of a sweep, and how it is told from the others."""

    name: str
    y: Sequence[float]
    colour: str
    dash: str = "solid"


@dataclass(frozen=True)
class Panel:
    """Lines of one quantity over a sweep, and the limits that they must keep: name, value and colour."""

    label: str
    lines: Sequence[Swept]
    limits: Sequence[tuple[str, float, str]]


def sweep(
    x: Sequence[float],
    label: str,
    panels: Sequence[Panel],
    marks: Mapping[str, float],
    passed: Sequence[tuple[float, float]],
) -> go.Figure:
    """Panels over one input: dotted lines are limits, upright ones are named values, and grey is where a limit is
    passed."""
    figure = make_subplots(rows=len(panels), cols=1, shared_xaxes=True, vertical_spacing=0.06)
    named: set[str] = set()
    for row, panel in enumerate(panels, 1):
        at = {"row": row, "col": 1}
        for line in panel.lines:
            figure.add_scatter(
                x=list(x),
                y=list(line.y),
                name=line.name,
                mode="lines",
                line={"color": line.colour, "width": 2.2, "dash": line.dash},
                showlegend=line.name not in named,
                hovertemplate="%{y:.4g}",
                **at,
            )
            named.add(line.name)
        for i, value in enumerate(sorted({value for _, value, _ in panel.limits})):
            here = [(name, colour) for name, at_value, colour in panel.limits if at_value == value]
            figure.add_hline(
                y=value,
                line={"color": here[0][1] if len(here) == 1 else WALL, "width": 1.6, "dash": "dot"},
                annotation={"text": "; ".join(name for name, _ in here), "font": {"size": 11}},
                annotation_position=("top left", "top right")[i % 2],
                **at,
            )
        figure.update_yaxes(title_text=panel.label, **at)
    for start, end in passed:
        figure.add_vrect(x0=start, x1=end, fillcolor=GROUND, line_width=0, layer="below")
    for i, (name, value) in enumerate(marks.items()):
        figure.add_vline(x=value, line={"color": WALL, "width": 1.4, "dash": "dash" if i else "solid"})
        figure.add_annotation(
            x=value, y=1, yref="paper", yanchor="bottom", yshift=14 * i, text=name, showarrow=False, font={"size": 12}
        )
    figure.update_xaxes(title_text=label, row=len(panels), col=1)
    figure.update_layout(hovermode="x unified", **_frame(120 + 190 * len(panels)))
    figure.update_layout(legend={"y": -58 / (190 * len(panels)), "yanchor": "top"}, margin={"t": 14 * len(marks) + 8})
    return figure


def ranges(
    names: Sequence[str], ours: Sequence[tuple[float, float, float]], band: tuple[float, float], said: str, unit: str
) -> go.Figure:
    """Figures with their intervals, one line each, over a band in which they should lie."""
    low, at, high = (list(values) for values in zip(*ours, strict=True))
    figure = go.Figure(
        go.Scatter(
            x=at,
            y=list(names),
            mode="markers",
            marker={"color": HOT, "size": 11, "symbol": "diamond"},
            error_x={
                "type": "data",
                "symmetric": False,
                "array": [end - x for end, x in zip(high, at, strict=True)],
                "arrayminus": [x - end for end, x in zip(low, at, strict=True)],
                "color": WALL,
                "thickness": 2,
                "width": 9,
            },
            hovertemplate=f"%{{y}}: %{{x:.4g}} {unit}<extra></extra>",
        )
    )
    figure.add_vrect(x0=band[0], x1=band[1], fillcolor=COLD, opacity=0.3, line={"color": COLD, "width": 1})
    figure.add_annotation(
        x=sum(band) / 2, y=1, yref="paper", yanchor="bottom", text=said, showarrow=False, font={"size": 12}
    )
    figure.update_layout(
        xaxis={"title": unit, "zeroline": False},
        yaxis={"autorange": "reversed", "range": [-0.6, len(names) - 0.4]},
        **{**_frame(90 + 60 * len(names)), "margin": {"l": 8, "r": 26, "t": 28, "b": 8}},
    )
    return figure
