"""The drawings: to scale, readable, vectors, the same every time."""

from __future__ import annotations

import math
import re
from dataclasses import replace
from io import BytesIO
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pytest
from matplotlib import rc_context
from PIL import Image
from pypdf import PdfReader

from lasescatter.assessment.outcome import Assessment
from lasescatter.report.document import pdf_bytes
from lasescatter.report.drawings import SHEET, beam_letter, draw_site
from lasescatter.report.figures import pdf_figures, write_figures
from lasescatter.report.ink import RC, cut, text_size
from lasescatter.report.labels import Rect, Room
from lasescatter.report.site_view import MARGIN, WIDTH, extent, near_plan, nice_at_least, scale_words, ticks, views
from lasescatter.scene import Beam, Box, LengthUnit, Scene, Stop

from .invented import BEAMS, GREEN, LOADS, PLACES, assessment, many, scene
from .pdf_text import entries

POINTS_PER_MM = 72 / 25.4


@pytest.fixture(scope="module")
def written(result: Assessment, tmp_path_factory: pytest.TempPathFactory) -> list[Path]:
    return write_figures(result, tmp_path_factory.mktemp("figures"), "bay")


def test_files_and_their_names(written: list[Path]) -> None:
    assert [path.name for path in written] == [
        "bay_plan.svg", "bay_plan.png", "bay_elevation.svg", "bay_elevation.png", "bay_phase.svg", "bay_phase.png",
    ]  # fmt: skip
    assert sorted(written[0].parent.iterdir()) == sorted(written)


def test_no_phase_figure_without_components(result: Assessment, tmp_path: Path) -> None:
    assert len(write_figures(replace(result, components=()), tmp_path, "bay")) == 4


def test_same_files_every_time(result: Assessment, written: list[Path], tmp_path: Path) -> None:
    for one, other in zip(written, write_figures(result, tmp_path, "bay"), strict=True):
        assert one.read_bytes() == other.read_bytes(), one.name


def test_vector_files_stand_alone(written: list[Path]) -> None:
    """Well-formed, no raster inside, no reference outside, letters as outlines."""
    for path in written:
        if path.suffix != ".svg":
            continue
        root = ElementTree.parse(path).getroot()
        names = {element.tag.split("}")[-1] for element in root.iter() if isinstance(element.tag, str)}
        assert not names & {"image", "text", "script", "a", "foreignObject"}
        for element in root.iter():
            for key, value in element.attrib.items():
                if key.endswith("href"):
                    assert value.startswith("#")


def test_pictures_have_ink_and_no_colour_carries_meaning_alone(written: list[Path]) -> None:
    """Beams stay apart without colour: every ink has its own stroke pattern."""
    from lasescatter.report.ink import BEAM_DASHES, BEAM_INKS

    for path in written:
        if path.suffix == ".png":
            grey = np.asarray(Image.open(path).convert("L"))
            assert grey.shape[1] == pytest.approx(SHEET / 25.4 * 200, abs=1, rel=0)
            assert 0.005 < (grey < 128).mean() < 0.3
    assert len({str(dash) for dash in BEAM_DASHES}) == len(BEAM_INKS)


@pytest.mark.parametrize("kind", ["plan", "elevation"])
def test_drawn_to_the_printed_scale(result: Assessment, kind: str) -> None:
    view = views(result.scene)[kind]
    with rc_context(RC):
        figure = draw_site(result, kind)
    axes = figure.axes[0]
    width, height = figure.get_size_inches() * 25.4
    assert width == pytest.approx(SHEET, rel=1e-9, abs=0)
    # One unit of the axes is a millimetre of the sheet.
    box = axes.get_position()
    assert box.width * width == pytest.approx(axes.get_xlim()[1], rel=1e-9, abs=0)
    assert box.height * height == pytest.approx(axes.get_ylim()[1], rel=1e-9, abs=0)
    # Two points of the site lie as far apart as the scale says.
    start, mirror = BEAMS[0].points[:2]
    apart = math.dist(view.paper(start), view.paper(mirror))
    assert apart * view.scale / 1000 == pytest.approx(9.0, rel=1e-9, abs=0)
    told = [text.get_text() for text in axes.texts]
    assert any(scale_words(view.scale) in text for text in told)


def test_placed_without_enlarging(reader: PdfReader) -> None:
    found = 0
    for page in reader.pages:
        forms = entries(page["/Resources"].get_object(), "/XObject")
        data = page.get_contents().get_data().decode("latin-1")
        for name, form in forms.items():
            assert re.search(rf"q 1 0 0 1 [\d.]+ [\d.]+ cm {name} Do Q", data)
            box = form.get_object()["/BBox"]
            assert float(box[2]) - float(box[0]) == pytest.approx(SHEET * POINTS_PER_MM, rel=1e-4, abs=0)
            found += 1
    assert found == 3


def test_everything_lies_inside(result: Assessment) -> None:
    for view in views(result.scene).values():
        shown = [point for beam in BEAMS for point in beam.points] + [o.position for o in result.observers]
        for point in shown:
            x, y = view.paper(point)
            assert MARGIN - 1e-6 <= x <= WIDTH - MARGIN + 1e-6
            assert 0 < y < view.height


def test_unit_of_the_site(tmp_path: Path) -> None:
    with rc_context(RC):
        figure = draw_site(assessment(unit=LengthUnit("ft", 0.3048)), "plan")
    assert figure.axes[0].get_xlabel() == "x [ft]"
    told = [text.get_text() for text in figure.axes[1].texts]
    bar = next(text for text in told if re.fullmatch(r"[\d.]+ ft", text))
    scale = float(next(re.search(r"1 : (\d+)", text)[1] for text in told if "1 : " in text))
    # 1 ft = 304.8 mm.
    assert 15 <= float(bar.split()[0]) * 304.8 / scale <= 70


def site_with(*beams: Beam, box: Box | None = None) -> Scene:
    made = scene()
    loads = made.loads if box is None else (replace(LOADS[0], region=box),)
    return replace(made, beams=beams, loads=loads)


UP = Beam("up", (GREEN,), "gaussian", ((0.0, 0.0, 2.0), (0.0, 0.0, 4.0)), (), "real", True, None, "b")
DOWN = Beam(
    "down", (GREEN,), "gaussian", ((2.0, 2.0, 3.0), (2.0, 2.0, 0.0)), (), "real", False, Stop(0.2, (0.0, 0.0, 1.0)), "b"
)
BACK = Beam(
    "back", (GREEN,), "gaussian", ((-3.0, 0.0, 1.0), (3.0, 0.0, 1.0), (-3.0, 0.0, 1.0)), (0.9,), "real", False,
    Stop(0.2, (1.0, 0.0, 0.0)), "b",
)  # fmt: skip
SPOT = Beam("spot", (GREEN,), "gaussian", ((0.0, 0.0, 0.0), (1e-6, 0.0, 0.0)), (), "real", True, None, "b")
LONG_WAY = Beam("far", (GREEN,), "gaussian", ((0.0, 0.0, 2.0), (5e4, 3e4, 2e4)), (), "real", True, None, "b")


@pytest.mark.parametrize("beams", [(UP,), (DOWN,), (BACK,), (SPOT,), (LONG_WAY,), (UP, DOWN, BACK, *BEAMS)])
def test_odd_sites_can_be_drawn(beams: tuple[Beam, ...], tmp_path: Path) -> None:
    made = replace(assessment(), scene=site_with(*beams))
    data, sizes = pdf_figures(made)
    # A leg that ends 60 km away leaves the rest too small to see: that gets a drawing of its own.
    assert len(PdfReader(BytesIO(data)).pages) == len(sizes) == (4 if beams == (LONG_WAY,) else 3)
    for _, height in sizes.values():
        assert height < 240


def test_legs_through_the_paper_are_told_in_the_key() -> None:
    made = replace(assessment(), scene=site_with(UP, DOWN))
    with rc_context(RC):
        told = [text.get_text() for text in draw_site(made, "plan").axes[1].texts]
        side = [text.get_text() for text in draw_site(made, "elevation").axes[1].texts]
    assert "leg towards the reader" in told and "leg away from the reader" in told
    assert "leg towards the reader" not in side


def test_a_far_observer_gets_the_rest_a_drawing_of_its_own() -> None:
    near = assessment()
    assert near_plan(near.scene) is None
    made = assessment((*((name, place) for name, place in PLACES), ("far away", (400.0, 30.0, 1.6))))
    view = near_plan(made.scene)
    assert view is not None and view.scale < 0.25 * views(made.scene)["plan"].scale
    with rc_context(RC):
        figure = draw_site(made, "plan", view)
    told = [text.get_text() for text in figure.axes[0].texts]
    assert "1 console operator" in told and not any("far away" in text for text in told)
    assert {"A1", "A2", "B1"} <= set(told)
    for text in figure.axes[0].texts:
        assert -1 <= text.get_position()[0] <= view.width + 1
    pages = PdfReader(BytesIO(pdf_bytes(replace(made, components=()), "A4"))).pages
    names = {name for page in pages for name in entries(page["/Resources"].get_object(), "/XObject")}
    assert names == {"/Figure-plan", "/Figure-plan_near", "/Figure-elevation"}


def test_a_vast_box_does_not_shrink_the_rest() -> None:
    near = extent(site_with(*BEAMS, box=Box((1.0, -3.0, 0.0), (8.0, 2.5, 3.0))))
    vast = extent(site_with(*BEAMS, box=Box((-1e5, -1e5, 0.0), (1e5, 1e5, 1e3))))
    assert math.dist(*vast) <= math.dist(*near) * 1.01


def test_hundred_observers_keep_their_numbers() -> None:
    with rc_context(RC):
        figure = draw_site(many(100), "plan")
    told = {text.get_text() for text in figure.axes[0].texts}
    assert {str(number) for number in range(1, 101)} <= told
    key = [text.get_text() for text in figure.axes[1].texts]
    assert any("names and places are in the report" in text for text in key)


def test_observers_over_one_another_share_a_label() -> None:
    made = assessment((("seated", (4.0, 1.5, 1.2)), ("standing", (4.0, 1.5, 1.7)), ("apart", (6.0, 1.5, 1.7))))
    with rc_context(RC):
        plan = {text.get_text() for text in draw_site(made, "plan").axes[0].texts}
        side = {text.get_text() for text in draw_site(made, "elevation").axes[0].texts}
    assert "1, 2" in plan and "3 apart" in plan
    assert {"1 seated", "2 standing", "3 apart"} <= side


def test_an_axis_has_two_heights_at_least() -> None:
    for low, high in ((-0.17, 1.37), (0.0, 1.0), (-9.0, 99.0), (0.4, 1.9), (-0.3, 2.4)):
        found = ticks(low, high, 2, 2)
        assert len(found) >= 2 and all(low <= value <= high for value in found), (low, high)


def test_elevation_shows_height_zero() -> None:
    for beams in ((UP,), BEAMS, (LONG_WAY,)):
        view = views(site_with(*beams))["elevation"]
        assert MARGIN - 1e-6 <= view.paper((0.0, 0.0, 0.0))[1] <= view.height - MARGIN + 1e-6


def test_the_ring_of_a_reach_is_in_the_key_where_it_is_drawn(result: Assessment) -> None:
    def key(reach: float) -> list[str]:
        observers = tuple(replace(observer, reach=reach) for observer in result.scene.observers)
        made = replace(result, scene=replace(result.scene, observers=observers))
        with rc_context(RC):
            return [text.get_text() for text in draw_site(made, "plan").axes[1].texts]

    assert "reach of an observer's head" in key(0.5)
    assert "reach of an observer's head" not in key(0.0)


def test_a_stop_is_hatched_and_no_mark_of_an_observer() -> None:
    from matplotlib.figure import Figure

    from lasescatter.report import symbols

    for normal in ((0.0, 1.0), (0.0, 0.0)):
        axes = Figure().add_subplot()
        symbols.plate(axes, (1.0, 1.0), normal, filled=True)
        (patch,) = axes.patches
        assert patch.get_hatch() and patch.get_facecolor()[:3] == (1.0, 1.0, 1.0)


def test_a_label_away_from_its_mark_has_a_leader() -> None:
    from matplotlib.figure import Figure

    from lasescatter.report import symbols

    axes = Figure().add_subplot()
    symbols.leader(axes, (0.0, 0.0), Rect(1.0, -1.0, 5.0, 1.0), 1.7)
    assert not axes.lines
    symbols.leader(axes, (0.0, 0.0), Rect(6.0, -1.0, 9.0, 1.0), 1.7)
    assert axes.lines[0].get_xdata()[1] == 6.0


def test_text_is_not_read_as_mathematics() -> None:
    made = assessment((("$x_1$", (4.0, 1.5, 1.6)),))
    with rc_context(RC):
        figure = draw_site(made, "plan")
    text = next(text for text in figure.axes[0].texts if "$x_1$" in text.get_text())
    assert not text.get_parse_math()


def test_round_numbers() -> None:
    assert [nice_at_least(value) for value in (1.0, 1.1, 2.2, 2.6, 40.0, 51.0, 0.03)] == [1, 2, 2.5, 5, 50, 100, 0.05]
    assert scale_words(50.0) == "1 : 50"
    assert scale_words(250000.0) == "1 : 250 000"
    assert scale_words(0.05) == "20 : 1"
    assert ticks(-3.2, 12.1, 9) == [-2.0, 0.0, 2.0, 4.0, 6.0, 8.0, 10.0, 12.0]


def test_letters_of_beams() -> None:
    assert [beam_letter(place) for place in (0, 1, 25, 26, 27, 51, 52, 701, 702)] == [
        "A", "B", "Z", "AA", "AB", "AZ", "BA", "ZZ", "AAA",
    ]  # fmt: skip


def test_labels_keep_off_one_another() -> None:
    room = Room(Rect(0, 0, 60, 60))
    room.mark((30.0, 30.0), 1.0)
    rects = []
    for _ in range(6):
        before = len(room.taken)
        assert room.place("label", 7.0, (30.0, 30.0), 1.5, forced=False) is not None
        rects.append(room.taken[before])
    for i, one in enumerate(rects):
        assert all(one.overlap(other) == 0 for other in rects[i + 1 :])


def test_no_room_is_said() -> None:
    room = Room(Rect(0, 0, 5, 5))
    assert room.place("far too long a label", 9.0, (2.5, 2.5), 1.0, forced=True) is None


def test_text_is_cut_to_a_width() -> None:
    assert cut("short", 6.0, 50.0) == "short"
    shown = cut("a much longer text than there is room for", 6.0, 20.0)
    assert shown.endswith("…")
    assert text_size(shown, 6.0)[0] <= 20.0
