"""Figures: their numbers, sizes, colours, text and reproducibility."""

from __future__ import annotations

import re
import struct
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from campaign.errors import Refused
from campaign.ledger.demonstration import build
from campaign.present.figures.endings import figure_path
from campaign.trends.curves import AXES, curves
from campaign.trends.reading import read_campaign


@pytest.fixture(scope="module")
def drawn_campaign(tmp_path_factory):
    built = build(tmp_path_factory.mktemp("figures") / "demo")
    return read_campaign(str(built.database))


@pytest.mark.parametrize("name", ["a.jpg", "a", "a.svg.gz"])
def test_other_endings_are_refused_with_what_is_expected(name):
    with pytest.raises(Refused, match="SVG, PDF or PNG"):
        figure_path(name)


def test_a_missing_folder_is_refused_before_anything_is_computed(tmp_path):
    with pytest.raises(Refused, match="needs the folder"):
        figure_path(str(tmp_path / "none" / "a.svg"))


@pytest.mark.parametrize(("width", "millimetres"), [("one", 85), ("two", 175)])
def test_png_is_as_wide_as_a_journal_column(drawn_campaign, width, millimetres):
    from campaign.present.figures.saving import PNG_DPI, content
    from campaign.present.figures.trends import trend_figure

    snapshot, criteria = drawn_campaign
    image = content(trend_figure(*curves("age", snapshot, criteria), width), "png")
    pixels = struct.unpack(">I", image[16:20])[0]
    assert abs(pixels / PNG_DPI * 25.4 - millimetres) < 0.2


@pytest.mark.parametrize("axis", AXES)
def test_every_series_of_the_table_is_drawn_with_its_specimens(drawn_campaign, axis):
    from campaign.present.figures.saving import content
    from campaign.present.figures.trends import trend_figure

    snapshot, criteria = drawn_campaign
    result, found = curves(axis, snapshot, criteria)
    assert [c.estimate.rows for c in found] == [e.rows for e in result.estimates]
    for one in found:
        assert len(set(one.specimen)) == one.estimate.n_specimens
        assert np.isfinite(one.y).all()
    svg = content(trend_figure(result, found, "two"), "svg").decode()
    words = re.sub(r"<[^>]+>", " ", svg)
    for electrode in {e.electrode for e in result.estimates}:
        assert electrode.split()[0] in words


def test_the_line_has_the_slope_of_the_table(drawn_campaign):
    snapshot, criteria = drawn_campaign
    _, orders = curves("concentration", snapshot, criteria)
    for one in orders:
        line = one.lines[0]
        slope = np.diff(np.log(line.y[[0, -1]]))[0] / np.diff(np.log(line.x[[0, -1]]))[0]
        assert slope == pytest.approx(-one.estimate.order, abs=1e-9)
    _, barriers = curves("temperature", snapshot, criteria)
    for one in barriers:
        line = one.lines[0]
        inverse = 1000 / (8.314462618 * line.x[[0, -1]])
        slope = np.diff(np.log(line.y[[0, -1]]))[0] / np.diff(inverse)[0]
        assert slope == pytest.approx(one.estimate.Ea_kJ_mol, rel=1e-9)
    _, ages = curves("age", snapshot, criteria)
    for one in ages:
        line = one.lines[0]
        assert np.log(line.y[-1]) / line.x[-1] == pytest.approx(one.estimate.rate, abs=1e-12)


def test_readings_lie_about_the_line(drawn_campaign):
    snapshot, criteria = drawn_campaign
    _, found = curves("concentration", snapshot, criteria)
    for one in found:
        line = one.lines[0]
        off = np.log(one.y) - np.interp(np.log(one.x), np.log(line.x), np.log(line.y))
        assert abs(off).max() < 1.2
        assert abs(off.mean()) < 0.15


def test_same_campaign_gives_the_same_bytes(drawn_campaign):
    from campaign.present.figures.saving import content
    from campaign.present.figures.trends import trend_figure

    snapshot, criteria = drawn_campaign
    for kind in ("svg", "pdf"):
        once, again = (
            content(trend_figure(*curves("age", snapshot, criteria), "one"), kind)
            for _ in range(2)
        )
        assert once == again


def test_same_campaign_gives_the_same_pixels_but_for_rounding(drawn_campaign):
    import io

    from matplotlib import image

    from campaign.present.figures.saving import content
    from campaign.present.figures.trends import trend_figure

    snapshot, criteria = drawn_campaign
    once, again = (
        image.imread(
            io.BytesIO(content(trend_figure(*curves("age", snapshot, criteria), "one"), "png"))
        )
        for _ in range(2)
    )
    assert once.shape == again.shape
    assert abs(once - again).max() <= 1.01 / 255


def test_svg_keeps_its_text_and_points_nowhere():
    from campaign.present.figures import style
    from campaign.present.figures.saving import content, inline_svg
    from campaign.present.figures.words import literal

    with style.styled():
        figure = style.sheet("one", 40.0)
        panel = figure.add_subplot()
        panel.set_title(literal(r"5 $ cell\alpha $x$ <b>"))
        panel.set_ylabel(style.quantity("R_ct", "ohm cm2"))
    svg = content(figure, "svg").decode()
    assert r"5 $ cell\alpha $x$ &lt;b&gt;" in svg
    assert "Ω cm²" in svg
    addresses = set(re.findall(r"https?://[^\"' <]+", re.sub(r"<metadata>.*?</metadata>", "", svg,
                                                             flags=re.DOTALL)))  # fmt: skip
    assert all(address.startswith("http://www.w3.org/") for address in addresses)
    page = inline_svg(figure, "f1", 'a "title" <x>')
    assert page.startswith("<svg") and page.endswith("</svg>")
    assert 'aria-label="a &quot;title&quot; &lt;x&gt;"' in page
    ids = set(re.findall(r'\bid="([^"]+)"', page))
    assert ids and all(one.startswith("f1-") for one in ids)
    assert set(re.findall(r'href="#([^"]+)"', page)) <= ids


# Machado, Oliveira & Fernandes, IEEE Trans. Vis. Comput. Graph. 15 (2009) 1291: linear RGB as
# seen without red (protanopia) and without green (deuteranopia) receptors; from memory.
BLIND = {
    "protanopia": [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216],
                   [-0.003882, -0.048116, 1.051998]],
    "deuteranopia": [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413],
                     [-0.011820, 0.042940, 0.968881]],
}  # fmt: skip


def _linear(colour: str) -> np.ndarray:
    rgb = np.array([int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)])
    return np.where(rgb <= 0.04045, rgb / 12.92, ((rgb + 0.055) / 1.055) ** 2.4)


def _lab(linear: np.ndarray) -> np.ndarray:
    """CIE 1976 L*a*b* of linear sRGB (IEC 61966-2-1 matrix, D65 white)."""
    xyz = np.array([[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722],
                    [0.0193, 0.1192, 0.9505]]) @ np.clip(linear, 0, 1)  # fmt: skip
    t = xyz / np.array([0.9505, 1.0, 1.089])
    f = np.where(t > (6 / 29) ** 3, np.cbrt(t), t / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.array([116 * f[1] - 16, 500 * (f[0] - f[1]), 200 * (f[1] - f[2])])


def test_colours_climb_in_lightness_so_that_grey_keeps_them_apart():
    from campaign.present.figures.style import PALETTE

    lightness = [_lab(_linear(colour))[0] for colour in PALETTE]
    assert min(np.diff(lightness)) > 8


@pytest.mark.parametrize("kind", BLIND)
def test_colours_stay_apart_without_red_or_green(kind):
    from campaign.present.figures.style import PALETTE

    seen = [_lab(np.array(BLIND[kind]) @ _linear(colour)) for colour in PALETTE]
    distances = [
        np.linalg.norm(a - b) for i, a in enumerate(seen) for b in seen[i + 1 :]
    ]
    assert min(distances) > 15


def test_matplotlib_is_not_loaded_without_a_figure(tmp_path):
    code = (
        "import sys\n"
        "import campaign.cli.main, campaign.present.drawing, campaign.present.plotting\n"
        "assert 'matplotlib' not in sys.modules\n"
    )
    root = Path(__file__).parents[2]
    subprocess.run([sys.executable, "-c", code], check=True, cwd=root)


def test_verdict_figures_name_every_step_and_verdict(drawn_campaign):
    from campaign.diagnosis.overtime import budgets_over_time
    from campaign.diagnosis.summary import diagnose, to_row
    from campaign.present.figures.budget import budget_figure, over_time
    from campaign.present.figures.matrix import summary_matrix
    from campaign.present.figures.saving import content

    snapshot, criteria = drawn_campaign
    found = diagnose(snapshot, criteria, electrodes=["NFM film A"], leave_one_out=False)
    row = to_row(found[0])
    words = re.sub(r"<[^>]+>", " ", content(summary_matrix([row], "one"), "svg").decode())
    assert "desolvation and adsorption" in words and "ion transport" in words
    over = budgets_over_time(snapshot, criteria, ["NFM film A"])
    shares = over_time("NFM film A", over["NFM film A"], criteria.working_time_s)
    total = sum(value for value, _, _ in shares.shares.values())
    assert np.allclose(total, 1.0)
    at = int(np.argmin(abs(np.log(shares.time_s / criteria.working_time_s))))
    assert shares.shares["R_ct"][0][at] == pytest.approx(row["budget"]["R_ct"], abs=0.02)
    assert b"<svg" in content(budget_figure([shares], "one"), "svg")


@pytest.mark.parametrize("axis", [*AXES, "solvent", "additive"])
def test_text_plots_fit_100_columns_and_name_each_series(drawn_campaign, axis):
    from importlib import import_module

    from campaign.present.plotting import trend_plot

    snapshot, criteria = drawn_campaign
    if axis in AXES:
        result, found = curves(axis, snapshot, criteria)
    else:
        module = import_module(f"campaign.trends.{axis}")
        result, found = module.estimate(snapshot, criteria), ()
    text = trend_plot(result, found)
    assert max(map(len, text.splitlines())) <= 100
    for one in result.estimates:
        assert one.electrode in text
        if not found:
            assert f"{one.a} / {one.b}"[:20] in text
    assert text.isascii()


def test_a_summary_split_by_solvents_names_them_in_its_figure(drawn_campaign):
    from campaign.diagnosis.summary import diagnose, to_row
    from campaign.present.figures.matrix import summary_matrix
    from campaign.present.figures.saving import content

    snapshot, criteria = drawn_campaign
    found = diagnose(
        snapshot, criteria, electrodes=["Prussian white D"], by="solvents", leave_one_out=False
    )
    svg = content(summary_matrix([to_row(one) for one in found], "two"), "svg").decode()
    assert "Prussian white D" in svg and "water" in svg


def test_users_text_is_never_set_as_a_formula(drawn_campaign):
    """A label with dollar signs and what would be a broken formula is drawn as it is."""
    from dataclasses import replace

    from campaign.present.figures.saving import content
    from campaign.present.figures.trends import trend_figure

    snapshot, criteria = drawn_campaign
    label = r"x$^{$_\frac{ %"
    readings = snapshot.readings
    renamed = replace(
        snapshot,
        readings=replace(
            readings, electrode=np.where(readings.electrode == "NFM film A", label,
                                         readings.electrode)
        ),
        electrodes={**snapshot.electrodes, label: snapshot.electrodes["NFM film A"]},
    )  # fmt: skip
    for axis in AXES:
        result, found = curves(axis, renamed, criteria)
        svg = content(trend_figure(result, found, "two"), "svg").decode()
        assert r"x$^{$_\frac{ %"[:4] in svg
