"""The s plane on a logarithmic scale, with the roots of H(s) and those of the twins."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes

from a2d.arrays import ComplexArray, IntArray
from a2d.report.roots import Roots, s_of_z
from a2d.report.style import ANALOG, FAINT_INK, GRID, INK, Sheet, twin_color
from a2d.report.text import hertz_with_unit, rate_label
from a2d.report.traces import Traces

Q_RAYS = (0.5, 0.707, 1.0, 2.0, 5.0)
WIDEST = 1e6  # ratio of frequencies on the plane
BEYOND_RATE = 2.0  # times the highest sample rate; poles of op-amps and strays far above it are counted, not drawn
VISIBLE = 1e-3  # Re s/|s| that can be told from the imaginary axis
S_PLANE = 1.6  # panels high
LABEL_GAP = 0.025  # of the radius


@dataclass(frozen=True)
class LogPlane:
    """Moves s along its ray to the distance lg(|s|/2π/inner): decades are rings, Q is a ray, 0 is the centre."""

    inner_hz: float
    outer_hz: float
    right_half: bool

    @classmethod
    def around(cls, s: ComplexArray, highest_hz: float) -> LogPlane:
        """Room for all of `s` up to `highest_hz`, a decade less than the lowest and a little more than the highest.

        What lies `WIDEST` below the highest goes to the centre: a zero at 0 that rounding has moved would else take
        most of the room.
        """
        shown = s[np.abs(s) <= 2.0 * np.pi * highest_hz]
        modulus = np.abs(shown[shown != 0.0]) / (2.0 * np.pi)
        low, high = (float(modulus.min()), float(modulus.max())) if modulus.size else (100.0, 1e4)
        inner = 10.0 ** float(np.floor(np.log10(max(low, high / WIDEST)) - 0.3))
        outside_centre = np.abs(shown) > 2.0 * np.pi * inner
        right = bool(np.any(outside_centre & (shown.real > VISIBLE * np.abs(shown))))
        return cls(inner, 1.3 * high, right)

    @property
    def radius(self) -> float:
        """Of the plane's rim."""
        return float(np.log10(self.outer_hz / self.inner_hz))

    def holds(self, roots: Roots) -> Roots:
        """Those of `roots` that are not beyond the rim."""
        return roots.where(np.abs(roots.values) <= 2.0 * np.pi * self.outer_hz)

    def place(self, s: ComplexArray) -> ComplexArray:
        """Where `s` is drawn, as x + jy."""
        modulus = np.abs(s)
        unit = np.divide(s, modulus, out=np.zeros_like(s), where=modulus > 0.0)
        return np.asarray(unit * np.log10(np.maximum(modulus / (2.0 * np.pi * self.inner_hz), 1.0)))


def draw_s_plane(axes: Axes, traces: Traces, sheet: Sheet) -> None:
    """Analog roots as broad marks, those of the twins (fs·ln z) as thin ones on them; conjugates are left out."""
    mapped = [s_of_z(twin.roots, twin.sample_rate_hz) for twin in traces.twins]
    highest_hz = BEYOND_RATE * max(twin.sample_rate_hz for twin in traces.twins)
    plane = LogPlane.around(np.concatenate([traces.roots.values, *(m.values for m in mapped)]), highest_hz)
    _rings_and_rays(axes, plane)
    analog = plane.holds(traces.roots)
    mark_roots(axes, plane.place(analog.values), analog, ANALOG, 4.0, 9.0)
    for index, roots in enumerate(map(plane.holds, mapped)):
        mark_roots(axes, plane.place(roots.values), roots, twin_color(index), 1.3, 6.5)
    _numbers(axes, plane.place(analog.values), analog, LABEL_GAP * plane.radius, sheet)
    far = int(np.sum(traces.roots.values.imag >= 0.0)) - int(np.sum(analog.values.imag >= 0.0))
    beyond = f" ({far} beyond {hertz_with_unit(highest_hz)})" if far else ""
    axes.set_title(f"s plane (logarithmic), twins at fs · ln z{beyond}")
    axes.set_aspect("equal")
    low, high, right = -0.1 * plane.radius, 1.1 * plane.radius, (1.06 if plane.right_half else 0.2) * plane.radius
    room = (high - low) * sheet.width / (S_PLANE * sheet.panel)  # the panel's own shape: the legend goes to the left
    axes.set_xlim(min(-1.2 * plane.radius, right - room), right)
    axes.set_ylim(low, high)
    bare(axes)
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


def mark_roots(axes: Axes, place: ComplexArray, roots: Roots, color: str, weight: float, size: float) -> None:
    """Poles as ×, zeros as ○, at `place`; the lower half plane is left out."""
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


@dataclass(frozen=True)
class RootLabel:
    """A text at `place`; on the real axis `level` says how many lines it is raised above its neighbours."""

    place: complex
    text: str
    on_axis: bool
    level: int = 0


def root_labels(place: ComplexArray, section: IntArray, gap: float) -> list[RootLabel]:
    """Section numbers (from 1) for roots of the upper half plane; what lies within `gap` shares a label."""
    shared: list[tuple[complex, set[int]]] = []
    for at, index in zip(place[place.imag >= 0.0], section[place.imag >= 0.0], strict=True):
        numbers = next((numbers for where, numbers in shared if abs(where - at) < gap), None)
        if numbers is None:
            shared.append((complex(at), {int(index) + 1}))
        else:
            numbers.add(int(index) + 1)
    shared.sort(key=lambda entry: entry[0].real)
    labels: list[RootLabel] = []
    for at, numbers in shared:
        text = ", ".join(str(n) for n in sorted(numbers))
        before = [other for other in labels if other.on_axis and at.real - other.place.real < 2.5 * gap]
        on_axis = at.imag < gap
        labels.append(RootLabel(at, text, on_axis, (before[-1].level + 1) % 3 if on_axis and before else 0))
    return labels


def _numbers(axes: Axes, place: ComplexArray, roots: Roots, gap: float, sheet: Sheet) -> None:
    for label in root_labels(place, roots.section, gap):
        axes.annotate(
            label.text,
            (label.place.real, label.place.imag),
            (0.0, 6.0 + 1.2 * sheet.text * label.level) if label.on_axis else (-6.0, 4.5),
            ha="center" if label.on_axis else "right",
            textcoords="offset points",
            fontsize=sheet.text - 0.5,
            color=INK,
        )


def bare(axes: Axes) -> None:
    """No box and no ticks: rings and rays are the axes here."""
    axes.grid(False)
    axes.set_xticks([])
    axes.set_yticks([])
    for side in axes.spines.values():
        side.set_visible(False)
