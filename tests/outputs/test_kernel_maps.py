"""Maps of kernels that are known in closed form."""

from __future__ import annotations

import matplotlib.pyplot as plt
import numpy as np
import pytest
from matplotlib.colors import to_hex

from aggsim.errors import InputError, KernelError
from aggsim.outputs import _axes, figures
from aggsim.sizes.means import volume_of

RANGE = {"smallest": 1e-7, "largest": 1e-5}
MIDDLE = float(volume_of(1e-6))


class Parts:
    """The least that a kernel must offer: names, single parts, rates."""

    def __init__(self, **parts):
        self.parts = parts
        self.names = tuple(parts)

    def __getitem__(self, name):
        return Parts(**{name: self.parts[name]})

    def __call__(self, v, w, time=0.0):
        shape = np.broadcast_shapes(np.shape(v), np.shape(w))
        return sum(
            (np.broadcast_to(f(v, w, time), shape) for f in self.parts.values()), start=np.zeros(shape)
        )


def flat(v, w, time):
    return 1e-17


def rising(v, w, time):
    return 1e-17 * np.sqrt(v * w) / MIDDLE  # equals `flat` where the product of the diameters is 1 um2


def settling(v, w, time):
    return 1e-17 * np.abs(v - w) / MIDDLE


def labels(ax) -> list[str]:
    return [text.get_text() for text in ax.get_legend().get_texts()]


def filled_at(ax, x, y) -> list[str]:
    """Colours of the filled contours that cover a point."""
    return [
        to_hex(contours.get_facecolor()[0])
        for contours in ax.collections
        if contours.filled and any(path.contains_point((x, y)) for path in contours.get_paths())
    ]


@pytest.mark.parametrize("draw", [figures.kernel_map, figures.dominant_mechanism_map])
def test_square_axis_with_logarithms_of_both_diameters(draw):
    _, ax = plt.subplots()
    assert draw(Parts(flat=flat, rising=rising), **RANGE, ax=ax) is ax
    assert plt.get_fignums() == [1]
    assert (ax.get_xscale(), ax.get_yscale()) == ("log", "log")
    assert ax.get_aspect() == 1.0
    assert ax.get_xlim() == ax.get_ylim() == pytest.approx((0.1, 10.0))
    assert ax.get_xlabel() == "diameter of the first particle [µm]"
    assert ax.get_ylabel() == "diameter of the second particle [µm]"
    ax.figure.canvas.draw()
    ax = draw(Parts(flat=flat, rising=rising), **RANGE, unit=1e-9)
    assert ax.get_xlim() == pytest.approx((100.0, 10000.0))


def test_colour_bar_names_decades_of_the_rate():
    ax = figures.kernel_map(Parts(rising=rising), **RANGE)
    bar = ax.figure.axes[1]
    assert bar.get_ylabel() == "collision rate $K$ [m³/s]"
    texts = [text.get_text() for text in bar.get_yticklabels()]
    assert texts == [f"$10^{{{k}}}$" for k in range(-20, -13)]  # 1e-17 * (0.1 to 10)^3


def test_white_lines_stand_at_the_rates_of_the_colour_bar():
    ax = figures.kernel_map(Parts(rising=rising), **RANGE)
    lines = next(contours for contours in ax.collections if not contours.filled)
    for level, path in zip(lines.levels, lines.get_paths(), strict=True):
        x, y = path.vertices.T
        # log10 K is linear in the logarithms of the diameters, so contours are straight but for the axis steps
        np.testing.assert_allclose(-17.0 + 1.5 * np.log10(x * y), level, atol=1e-3)


@pytest.mark.parametrize(
    ("factor", "expected"),
    [(1.0, ["$10^{-17}$"]), (2.0, [r"$2\times10^{-17}$"]), (3.5e8, [r"$3.5\times10^{-9}$"])],
)
def test_one_rate_everywhere(factor, expected):
    ax = figures.kernel_map(Parts(flat=lambda v, w, t: factor * 1e-17), **RANGE)
    ax.figure.canvas.draw()
    assert [text.get_text() for text in ax.figure.axes[1].get_yticklabels()] == expected


def test_narrow_range_of_rates_gets_figures_between_the_decades():
    ax = figures.kernel_map(Parts(mild=lambda v, w, t: 1.1e-17 * (v * w / MIDDLE**2) ** 0.1), **RANGE)
    texts = [text.get_text() for text in ax.figure.axes[1].get_yticklabels()]
    assert texts == [r"$5\times10^{-18}$", "$10^{-17}$", r"$2\times10^{-17}$"]


def test_rates_that_vanish_are_marked_at_the_colour_bar():
    ax = figures.kernel_map(Parts(settling=settling), **RANGE)
    filled = next(contours for contours in ax.collections if contours.filled)
    assert filled.extend == "min"
    assert filled.levels[0] > -30.0  # the diagonal does not stretch the scale
    assert (
        next(c for c in figures.kernel_map(Parts(r=rising), **RANGE).collections if c.filled).extend != "max"
    )


def test_time_reaches_the_kernel():
    growing = Parts(growing=lambda v, w, t: (1.0 + t) * 1e-17)
    ax = figures.kernel_map(growing, **RANGE, time=99.0)
    assert ax.figure.axes[1].get_yticklabels()[0].get_text() == "$10^{-15}$"
    pair = Parts(flat=flat, growing=lambda v, w, t: t * 1e-17)
    assert labels(figures.dominant_mechanism_map(pair, **RANGE, time=3.0))[:2] == [
        "flat (leads nowhere)",
        "growing",
    ]


def test_leading_part_is_the_one_with_the_largest_rate():
    ax = figures.dominant_mechanism_map(Parts(flat=flat, rising=rising), **RANGE)
    first, second = (to_hex(colour) for colour in _axes.COLOURS[:2])
    for x, y in [(0.3, 3.0), (0.9, 1.0), (0.15, 5.0), (0.11, 0.11)]:
        assert filled_at(ax, x, y) == filled_at(ax, y, x) == [first]
    for x, y in [(0.4, 3.0), (1.1, 1.0), (0.15, 8.0), (9.0, 9.0)]:
        assert filled_at(ax, x, y) == filled_at(ax, y, x) == [second]
    assert labels(ax) == ["flat", "rising", "leading part holds 90 %"]


def test_line_of_ninety_percent():
    kernel = Parts(flat=flat, rising=rising)
    ax = figures.dominant_mechanism_map(kernel, **RANGE)
    lines = [contours for contours in ax.collections if not contours.filled]
    assert len(lines) == 1
    x, y = lines[0].get_paths()[0].vertices.T
    rates = np.array([kernel[name](volume_of(x * 1e-6), volume_of(y * 1e-6)) for name in kernel.names])
    # linear interpolation between 240 diameters per side
    np.testing.assert_allclose(rates.max(axis=0) / rates.sum(axis=0), 0.9, atol=1e-3)


def test_line_of_fifty_percent_where_three_parts_compete():
    three = Parts(a=flat, b=rising, c=lambda v, w, t: 1e-17 * (np.sqrt(v * w) / MIDDLE) ** 0.5)
    assert "leading part holds 50 %" in labels(figures.dominant_mechanism_map(three, **RANGE))


def test_part_that_leads_nowhere_is_named():
    weak = Parts(flat=flat, weak=lambda v, w, t: 1e-30)
    ax = figures.dominant_mechanism_map(weak, **RANGE)
    assert labels(ax) == ["flat", "weak (leads nowhere)"]
    ax.figure.canvas.draw()


def test_single_part_and_pairs_that_never_meet():
    ax = figures.dominant_mechanism_map(Parts(settling=settling), **RANGE)
    assert labels(ax) == ["settling"]
    assert filled_at(ax, 0.2, 5.0) == [to_hex(_axes.COLOURS[0])]


@pytest.mark.parametrize("draw", [figures.kernel_map, figures.dominant_mechanism_map])
def test_refusals(draw):
    with pytest.raises(InputError, match="largest=1e-06 m"):
        draw(Parts(flat=flat), smallest=1e-6, largest=1e-6)
    with pytest.raises(InputError, match=r"smallest=0\.1 m is larger than a particle"):
        draw(Parts(flat=flat), smallest=0.1, largest=10.0)
    with pytest.raises(InputError, match="unit="):
        draw(Parts(flat=flat), **RANGE, unit=1e-5)
    with pytest.raises(KernelError, match="all zero"):
        draw(Parts(none=lambda v, w, t: 0.0), **RANGE)


def test_real_kernels():
    from aggsim import kernels
    from aggsim.inputs import Flow, Fractal, Medium, Particles

    water = Medium.water(temperature=298.15, ionic_strength=60.0)
    flocs = Fractal(Particles(diameter=400e-9, density=1055.0), dimension=2.1)
    kernel = kernels.brownian(flocs, water) + kernels.shear(flocs, Flow(shear_rate=50.0))
    assert labels(figures.dominant_mechanism_map(kernel, **RANGE))[:2] == ["Brownian", "shear"]
    ax = figures.kernel_map(kernel, **RANGE)
    ax.figure.canvas.draw()
