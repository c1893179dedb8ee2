"""The figure of the passbands: everything is drawn, named once, and written only where it can be."""

from __future__ import annotations

from pathlib import Path

import pytest

from vetter.errors import InputError
from vetter.light.bands_figure import PANELS, bands_figure, write_bands_figure
from vetter.light.tables import LightTables, load_tables


def test_every_band_is_drawn_and_named() -> None:
    figure = bands_figure()
    panels = figure.axes
    assert [axes.get_ylabel() for axes in panels] == list(PANELS)
    assert sum(len(axes.lines) for axes in panels) == len(load_tables().passbands)
    for axes in panels:
        names = [text.get_text() for text in axes.texts]
        assert len(set(names)) == len(names) == len(axes.lines)
        for line, text in zip(axes.lines, axes.texts, strict=True):
            low, high = line.get_xdata()[[0, -1]]
            assert low < text.get_position()[0] < high
            assert max(line.get_ydata()) == 1.0


def test_names_do_not_touch() -> None:
    """In the drawn figure no name overlaps another of its panel."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg

    figure = bands_figure()
    canvas = FigureCanvasAgg(figure)
    canvas.draw()
    for axes in figure.axes:
        boxes = [text.get_window_extent() for text in axes.texts]
        assert not any(a.overlaps(b) for i, a in enumerate(boxes) for b in boxes[:i]), axes.get_ylabel()


def test_only_systems_that_are_there_have_a_panel(world: LightTables) -> None:
    assert [axes.get_ylabel() for axes in bands_figure(world).axes] == [
        "GALEX",
        "Johnson, Cousins",
        "Gaia, TESS",
        "2MASS",
        "WISE, Spitzer",
    ]


@pytest.mark.parametrize(("name", "head"), [("bands.png", b"\x89PNG"), ("bands.PDF", b"%PDF"), ("b.svg", b"<?xml")])
def test_written_formats(world: LightTables, tmp_path: Path, name: str, head: bytes) -> None:
    write_bands_figure(tmp_path / name, world)
    assert (tmp_path / name).read_bytes().startswith(head)


@pytest.mark.parametrize(
    ("name", "expected"), [("bands.txt", r"\.png, \.pdf or \.svg"), ("absent/bands.png", "can be written")]
)
def test_refusals(world: LightTables, tmp_path: Path, name: str, expected: str) -> None:
    with pytest.raises(InputError, match=expected):
        write_bands_figure(tmp_path / name, world)
