"""The picture of a regime chart: there, whole, coloured as the verdicts are, with its words."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from matplotlib.colors import to_rgb
from matplotlib.image import imread

import fluidev
from fluidev.lab.chart import Chart, Laws, chart_of
from fluidev.lab.chart_picture import chart_picture, write_chart
from fluidev.lab.chart_sheet import TONES, Sheet, box_round
from fluidev.readout.verdict import VERDICTS
from tests.cli.cases import BAR


@pytest.fixture(scope="module")
def chart() -> Chart:
    """A chart with four regions, in a coarse grid."""
    fluid = (
        'fluid={density = "1e12/cm^2", dirac_velocity = "1e6 m/s", '
        'electron_mean_free_path = "0.1 um", momentum_mean_free_path = "80 um"}'
    )
    return chart_of(
        fluidev.parse(BAR, [fluid]),
        100.0,
        Laws(phonon_share=0.1),
        temperatures=(5.0, 5000.0),
        points=201,
    )


def texts(figure) -> list[str]:
    found = [text.get_text() for text in figure.texts]
    return found + [text.get_text() for axes in figure.axes for text in axes.texts]


def test_the_regions_have_the_tones_of_their_verdicts(chart: Chart, tmp_path: Path) -> None:
    write_chart(chart, tmp_path / "new" / "chart.png")
    assert [path.name for path in (tmp_path / "new").iterdir()] == ["chart.png"]
    picture = imread(tmp_path / "new" / "chart.png")[..., :3]
    assert picture.shape[0] > 1000 and picture.shape[1] > 1200
    for edge in (picture[:3], picture[-3:], picture[:, :3], picture[:, -3:]):
        assert (edge == 1.0).all()
    shares = np.bincount(chart.verdicts.ravel(), minlength=len(VERDICTS)) / chart.verdicts.size
    assert (shares[:4] > 0.02).all()
    axes = 6.3 * 4.2 * 200**2
    for name, share in zip(VERDICTS[:4], shares, strict=False):
        near = np.abs(picture - to_rgb(TONES[name])).max(axis=2) < 0.01
        # Lines and letters cover some of each.
        assert 0.8 * share < near.sum() / axes < 1.02 * share


def test_words(chart: Chart) -> None:
    said = texts(chart_picture(chart))
    for wanted in ("A bar", "not a fluid", "crossover", "viscous", "ohmic"):
        assert wanted in said
    assert "100 K, 1.00 × 10¹² cm⁻²" in said
    assert "flow regime  ·  W = 2.00 µm (the narrowest passage)" in said
    assert any("10 % phonons" in text for text in said)
    assert any("fluidev" in text and chart.case.text_sha256[:12] in text for text in said)
    labels = [text for text in said if text.startswith("$")]
    assert r"$l_\mathrm{ee} = W$" in labels
    assert {"$D/W = 0.05$", "$D/W = 0.5$"} <= set(labels)
    figure = chart_picture(chart)
    assert any(axes.get_xlabel() == "temperature (K)" for axes in figure.axes)
    assert any(axes.get_ylabel() == "density (10¹² cm⁻²)" for axes in figure.axes)


def test_texts_do_not_overlap(chart: Chart) -> None:
    figure = chart_picture(chart)
    figure.canvas.draw()
    axes = next(axes for axes in figure.axes if axes.get_xlabel())
    boxes = [text.get_window_extent() for text in axes.texts]
    assert len(boxes) > 8
    overlaps = [
        (a.get_text(), b.get_text())
        for i, a in enumerate(axes.texts)
        for j, b in enumerate(axes.texts)
        if i < j and boxes[i].overlaps(boxes[j])
    ]
    assert overlaps == []


def test_a_region_without_room_for_its_name_is_in_the_key(chart: Chart) -> None:
    beyond = chart_of(
        chart.case, 100.0, Laws(phonon_share=0.1), (5.0, 85.0), (0.98e16, 1.02e16), points=101
    )
    assert "viscous" not in {VERDICTS[i] for i in np.unique(beyond.verdicts[:, 0])}
    figure = chart_picture(beyond)
    keys = [text.get_text() for legend in figure.legends for text in legend.get_texts()]
    assert "viscous" in keys + texts(figure)


def test_without_friction_and_far_from_the_point(chart: Chart, tmp_path: Path) -> None:
    fluid = (
        'fluid={density = "1e12/cm^2", mass = "0.03 m_e", '
        'electron_mean_free_path = "0.1 um", relaxation_time = "inf"}'
    )
    made = fluidev.parse(BAR, [fluid, "magnetic_field=50 mT", 'title=""'])
    far = chart_of(made, 100.0, None, (1.0, 1e5), (1e18, 1e19), points=51)
    write_chart(far, tmp_path / "chart.pdf")
    assert (tmp_path / "chart.pdf").read_bytes().startswith(b"%PDF")
    said = texts(chart_picture(far))
    assert not any(text.startswith("$D/W") for text in said)
    assert any("B = 50.0 mT" in text for text in said)
    assert not any("10¹² cm⁻²" in text for text in said)  # the point is not on the chart


def test_tones_differ_in_brightness() -> None:
    light = sorted(np.dot(to_rgb(TONES[name]), [0.2126, 0.7152, 0.0722]) for name in VERDICTS[:4])
    assert min(np.diff(light)) > 0.05


def test_places_on_a_sheet(chart: Chart) -> None:
    figure = chart_picture(chart)
    axes = next(axes for axes in figure.axes if axes.get_xlabel())
    sheet = Sheet(figure, axes, chart, (6.0, 4.0), 1e16)
    middle = (np.sqrt(5.0 * 5000.0), 1e16)
    assert sheet.inches(*middle) == pytest.approx([3.0, 2.0])
    assert sheet.verdict((0.0, 2.0)) == "not a fluid"
    assert sheet.verdict((6.0, 2.0)) == "ohmic"
    assert box_round((1.0, 2.0), 0.4, 0.2) == pytest.approx((0.8, 1.9, 1.2, 2.1))
    assert sheet.clear((0.1, 0.1, 1.0, 1.0)) and not sheet.clear((0.1, 0.1, 6.0, 1.0))
    sheet.taken.append((0.5, 0.5, 2.0, 2.0))
    assert not sheet.clear((0.1, 0.1, 1.0, 1.0))
    assert sheet.clear((0.1, 0.1, 0.4, 0.4))
