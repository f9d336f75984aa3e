"""Poles and zeros: all on one logarithmic s plane, and those of each twin in the upper half of the unit circle."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from a2d.arrays import ComplexArray
from a2d.compare.errors import Comparison
from a2d.report.roots import Roots, s_of_z
from a2d.report.style import ANALOG, FAINT_INK, GRID, INK, Sheet, twin_color
from a2d.report.text import hertz, hertz_with_unit, plain, rate_label
from a2d.report.traces import Traces

Q_RAYS = (0.5, 0.707, 1.0, 2.0, 5.0)
RIM_HZ = (1e3, 2e3, 5e3, 10e3, 20e3, 40e3, 80e3)
WIDEST = 1e6  # ratio of frequencies on the s plane
S_PLANE = 1.6  # panels high
FAR_OUT = 1.35  # |z| of a zero that the unit circle's panel leaves out, and counts in its title


def draw_roots(traces: Traces, comparisons: Sequence[Comparison], sheet: Sheet) -> Figure:
    """The s plane above, the z planes below, a key to the section numbers at the foot."""
    del comparisons
    columns = sheet.columns
    rows = -(-len(traces.twins) // columns)
    key = _key(traces.names, int(11.0 * sheet.width))
    heights = [S_PLANE * sheet.panel, *[0.48 * sheet.width / columns + 0.3] * rows]
    foot = 0.018 * sheet.text * (1 + key.count("\n")) + 0.35
    figure = Figure(figsize=(sheet.width, sum(heights) + foot), layout="constrained")
    grid = figure.add_gridspec(len(heights), columns, height_ratios=heights)
    _s_plane(figure.add_subplot(grid[0, :]), traces, sheet)
    for index, twin in enumerate(traces.twins):
        axes = figure.add_subplot(grid[1 + index // columns, index % columns])
        _z_plane(axes, twin.roots, twin.sample_rate_hz, index)
    figure.supxlabel(key, x=0.01, ha="left", fontsize=sheet.text - 1.0, color=INK)
    return figure


def _key(names: Sequence[str], width: int) -> str:
    """`1 low cut · 2 body · ...`, broken into lines of at most `width` characters where names allow."""
    lines = [""]
    for number, name in enumerate(names, 1):
        entry = f"{number} {plain(name)}"
        if lines[-1] and len(lines[-1]) + len(entry) + 3 > width:
            lines.append("")
        lines[-1] += f" · {entry}" if lines[-1] else entry
    return "\n".join(lines)


@dataclass(frozen=True)
class LogPlane:
    """Moves s along its ray to the distance lg(|s|/2π/inner): decades are rings, Q is a ray, 0 is the centre."""

    inner_hz: float
    outer_hz: float
    right_half: bool

    @classmethod
    def around(cls, s: ComplexArray) -> LogPlane:
        """Room for all of `s`, a decade less than the lowest and a little more than the highest.

        What lies `WIDEST` below the highest goes to the centre: a zero at 0 that rounding has moved would else take
        most of the room.
        """
        modulus = np.abs(s[s != 0.0]) / (2.0 * np.pi)
        low, high = (float(modulus.min()), float(modulus.max())) if modulus.size else (100.0, 1e4)
        right = bool(np.any(s.real > 1e-9 * np.abs(s)))
        return cls(10.0 ** float(np.floor(np.log10(max(low, high / WIDEST)) - 0.3)), 1.3 * high, right)

    @property
    def radius(self) -> float:
        """Of the plane's rim."""
        return float(np.log10(self.outer_hz / self.inner_hz))

    def place(self, s: ComplexArray) -> ComplexArray:
        """Where `s` is drawn, as x + jy."""
        modulus = np.abs(s)
        unit = np.divide(s, modulus, out=np.zeros_like(s), where=modulus > 0.0)
        return np.asarray(unit * np.log10(np.maximum(modulus / (2.0 * np.pi * self.inner_hz), 1.0)))


def _s_plane(axes: Axes, traces: Traces, sheet: Sheet) -> None:
    """Analog roots as broad marks, those of the twins (fs·ln z) as thin ones on them; conjugates are left out."""
    mapped = [s_of_z(twin.roots, twin.sample_rate_hz) for twin in traces.twins]
    plane = LogPlane.around(np.concatenate([traces.roots.values, *(m.values for m in mapped)]))
    _rings_and_rays(axes, plane)
    _marks(axes, plane.place(traces.roots.values), traces.roots, ANALOG, 4.0, 9.0)
    for index, roots in enumerate(mapped):
        _marks(axes, plane.place(roots.values), roots, twin_color(index), 1.3, 6.5)
    _numbers(axes, plane.place(traces.roots.values), traces.roots, sheet)
    axes.set_aspect("equal")
    axes.set_title("s plane (logarithmic), twins at fs · ln z")
    low, high, right = -0.1 * plane.radius, 1.1 * plane.radius, (1.06 if plane.right_half else 0.2) * plane.radius
    room = (high - low) * sheet.width / (S_PLANE * sheet.panel)  # the panel's own shape: the legend goes to the left
    axes.set_xlim(min(-1.2 * plane.radius, right - room), right)
    axes.set_ylim(low, high)
    _bare(axes)
    _root_legend(axes, traces, sheet, plane.right_half)


def _root_legend(axes: Axes, traces: Traces, sheet: Sheet, right_half: bool) -> None:
    """Beside the quarter plane; below a half plane, which leaves no room beside it."""
    axes.plot([], [], "x", color=INK, label="pole")
    axes.plot([], [], "o", color=INK, markerfacecolor="none", label="zero")
    axes.plot([], [], color=ANALOG, linewidth=5.0, label="analog")
    for index, twin in enumerate(traces.twins):
        axes.plot([], [], color=twin_color(index), label=f"twin at {rate_label(twin.sample_rate_hz)}")
    if sheet.columns > 1 and not right_half:
        axes.legend(handlelength=1.6, loc="upper left", borderaxespad=0.0)
    else:
        columns = 5 if sheet.columns > 1 else 2
        axes.legend(handlelength=1.6, loc="upper left", bbox_to_anchor=(0.0, -0.02), ncols=columns)


def _rings_and_rays(axes: Axes, plane: LogPlane) -> None:
    """Rings at decades. Poles of quality Q lie at the angle arccos(1/(2·Q)) from the negative real axis."""
    turn = np.linspace(0.0 if plane.right_half else np.pi / 2.0, np.pi, 181)
    radius = plane.radius
    for decade in range(1, int(np.floor(radius)) + 1):
        axes.plot(decade * np.cos(turn), decade * np.sin(turn), color=GRID, linewidth=0.9, zorder=0)
        text = hertz_with_unit(plane.inner_hz * 10.0**decade)
        axes.text(-decade, -0.025 * radius, text, ha="center", va="top", color=FAINT_INK)
    axes.text(0.0, -0.025 * radius, "0", ha="center", va="top", color=FAINT_INK)
    axes.plot([-radius, radius if plane.right_half else 0.0], [0.0, 0.0], color=FAINT_INK, linewidth=0.9, zorder=0)
    axes.plot([0.0, 0.0], [0.0, radius], color=FAINT_INK, linewidth=0.9, zorder=0)
    for q in Q_RAYS:
        angle = np.pi - np.arccos(1.0 / (2.0 * q))
        x, y = radius * np.cos(angle), radius * np.sin(angle)
        axes.plot([0.0, x], [0.0, y], color=GRID, linewidth=0.9, zorder=0)
        axes.text(x - 0.01 * radius, y + 0.015 * radius, f"Q {q:g}", ha="right", va="bottom", color=FAINT_INK)
    axes.text(0.0, 1.015 * radius, " Q ∞", ha="left", va="bottom", color=FAINT_INK)


def _marks(axes: Axes, place: ComplexArray, roots: Roots, color: str, weight: float, size: float) -> None:
    upper = place.imag >= 0.0
    for kind, sign in ((roots.is_pole, "x"), (~roots.is_pole, "o")):
        at = place[upper & kind]
        if at.size:  # an empty line outside its panel would confuse the layout
            axes.plot(
                at.real,
                at.imag,
                sign,
                color=color,
                markersize=size,
                markeredgewidth=weight,
                markerfacecolor="none",
                clip_on=False,
            )


def _numbers(axes: Axes, place: ComplexArray, roots: Roots, sheet: Sheet) -> None:
    """The section's number beside its roots; what lies close together shares a label."""
    labels: list[tuple[complex, set[int]]] = []
    for at, index in zip(place, roots.section, strict=True):
        near = next((numbers for where, numbers in labels if abs(where - at) < 0.12), None)
        if near is not None:
            near.add(int(index) + 1)
        elif at.imag >= 0.0:
            labels.append((complex(at), {int(index) + 1}))
    for at, numbers in labels:
        text = ", ".join(str(n) for n in sorted(numbers))
        axes.annotate(
            text,
            (at.real, at.imag),
            (-6.0, 4.5),
            ha="right",
            textcoords="offset points",
            fontsize=sheet.text - 0.5,
            color=INK,
        )


def _z_plane(axes: Axes, roots: Roots, sample_rate_hz: float, index: int) -> None:
    turn = np.linspace(0.0, np.pi, 181)
    axes.plot(np.cos(turn), np.sin(turn), color=FAINT_INK, linewidth=0.9)
    axes.plot([-1.0, 1.0], [0.0, 0.0], color=FAINT_INK, linewidth=0.9, zorder=0)
    for f in RIM_HZ:
        angle = 2.0 * np.pi * f / sample_rate_hz
        if 0.2 < angle < 0.97 * np.pi:
            x, y = np.cos(angle), np.sin(angle)
            axes.plot([0.0, x], [0.0, y], color=GRID, linewidth=0.8, zorder=0)
            side = "left" if x > 0.15 else "right" if x < -0.15 else "center"
            axes.text(1.05 * x, 1.05 * y, hertz(f), color=FAINT_INK, ha=side, va="bottom")
    near = np.abs(roots.values) < FAR_OUT
    shown = Roots(roots.values[near], roots.is_pole[near], roots.section[near])
    _marks(axes, shown.values, shown, twin_color(index), 1.5, 7.0)
    far = int(np.sum(~near & (roots.values.imag >= 0.0)))
    axes.set_title(f"z plane, {rate_label(sample_rate_hz)}" + (f" ({far} further out)" if far else ""))
    axes.set_aspect("equal")
    axes.set_xlim(-1.36, 1.36)
    axes.set_ylim(-0.1, 1.2)
    _bare(axes)


def _bare(axes: Axes) -> None:
    """No box and no ticks: rings and rays are the axes here."""
    axes.grid(False)
    axes.set_xticks([])
    axes.set_yticks([])
    for side in axes.spines.values():
        side.set_visible(False)
