"""Tables in CSV files: how they may be written, what becomes of them, and that nothing else is read."""

from __future__ import annotations

import math
import os
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad
from site_cases import GOOD, TABLES, changed, read_text

from lasescatter.problems import SiteError
from lasescatter.site.columns import MOST_ROWS, MOST_TOLD, TableError
from lasescatter.site.files import LARGEST_TABLE, LARGEST_TOGETHER
from lasescatter.site.index_csv import index_table
from lasescatter.site.matrix_csv import mean_over_sphere, measured_matrix
from lasescatter.site.size_csv import size_table

SIZES = "radius [um],dN/dlnr\n0.1,1\n0.2,4\n0.4,2\n"


def integral(table) -> float:
    """Of a density that is linear in ln r, by an independent rule on each piece."""
    logs = [math.log(radius) for radius in table.radii]

    def density(x: float) -> float:
        place = max(i for i, log in enumerate(logs[:-1]) if log <= x)
        share = (x - logs[place]) / (logs[place + 1] - logs[place])
        return table.density[place] * (1 - share) + table.density[place + 1] * share

    return sum(quad(density, low, high)[0] for low, high in pairwise(logs))


def test_sizes_integrate_to_one_and_keep_their_shape():
    table, told = size_table("sizes.csv", SIZES)
    assert table.radii == (1e-7, 2e-7, 4e-7)
    assert integral(table) == pytest.approx(1, rel=1e-12, abs=0)
    assert [value / table.density[0] for value in table.density] == pytest.approx([1, 4, 2], rel=1e-15, abs=0)
    assert "cut off where it still has 50 % of its highest value" in told


@pytest.mark.parametrize(
    "text",
    [
        "\ufeff" + SIZES,
        SIZES.replace("\n", "\r\n"),
        SIZES.replace("\n", "\r"),
        SIZES.replace(",", ";"),
        SIZES.replace(",", "\t"),
        SIZES.replace(",", " , "),
        SIZES.replace("\n", ",,\n"),
        "# remark, with commas\n\n" + SIZES.replace("0.2", "  # another\n0.2"),
        '"radius [um]","dN/dlnr [1/cm^3]"\n"0.1","1"\n0.2,4e0\n.4,+2.\n',
        "R (µm), dN / dln r\n0.1,1\n0.2,4\n0.4,2\n",
        "dN/dln(r),radius [nm]\n3,100\n12,200\n6,400\n",
        "diameter [um],dN/dlogDp [#/cm3]\n0.2,1\n0.4,4\n0.8,2\n",
        "Dp [nm],dN/dlog10(Dp)\n200,1\n400,4\n800,2\n",
    ],
)
def test_one_table_written_in_many_ways(text):
    table, _ = size_table("sizes.csv", text)
    expected, _ = size_table("sizes.csv", SIZES)
    assert table.radii == pytest.approx(expected.radii, rel=1e-15, abs=0)
    assert table.density == pytest.approx(expected.density, rel=1e-14, abs=0)


def test_decimal_digits_of_a_column_are_converted_exactly():
    table, _ = size_table("sizes.csv", "radius [um],dN/dlnr\n0.3,1\n0.7,1\n")
    assert table.radii == (0.3e-6, 0.7e-6)


def test_an_index_table():
    table, told = index_table("water.csv", "λ [um]; n; k\n0.5; 1.335; 1e-9\n1.064; 1.326; 2.9e-6\n")
    assert table.wavelengths == (0.5e-6, 1.064e-6) and table.real == (1.335, 1.326)
    assert table.imaginary == (1e-9, 2.9e-6) and table.unconfirmed == (False, False)
    assert table.name == "water.csv" and "water.csv" in table.source and "beyond them" in told


def matrix_text(function, step=1.0, header="angle [deg],F11") -> str:
    count = round(180 / step)
    return header + "\n" + "".join(f"{i * step!r},{function(math.radians(i * step))}\n" for i in range(count + 1))


def test_a_matrix_is_normalised_by_the_mean_of_the_straight_lines_between_its_angles():
    """Against adaptive quadrature, each straight piece by itself (scipy)."""
    forward = lambda theta: f"{5 + 4 * math.cos(theta) + 300 * math.exp(-theta / 0.05):.9g}"  # noqa: E731
    matrix, told = measured_matrix("dust.csv", matrix_text(forward, 0.5))
    raw = [float(forward(angle)) for angle in matrix.angles]
    pieces = zip(matrix.angles[:-1], matrix.angles[1:], raw[:-1], raw[1:], strict=True)
    mean = sum(quad(lambda t, a=a, b=b, p=p, q=q: (p + (q - p) * (t - a) / (b - a)) * math.sin(t) / 2, a, b)[0]
               for a, b, p, q in pieces)  # fmt: skip
    assert matrix.normalised_by == pytest.approx(mean, rel=1e-13, abs=0)
    assert mean_over_sphere(matrix.angles, matrix.f11) == pytest.approx(1, rel=1e-13, abs=0)
    assert f"divided by {matrix.normalised_by:.9g}" in told and "without polarization" in told
    assert matrix.angles[0] == 0 and matrix.angles[-1] == math.pi and matrix.f12 is None


@pytest.mark.parametrize(("step", "read"), [(5.0, False), (1.0, True), (0.25, True)])
def test_a_forward_peak_that_the_rows_do_not_follow_is_refused(step, read):
    """Henyey & Greenstein 1941 with g = 0.9, whose mean is 1: rows 5 degrees apart would make it too large."""
    g = 0.9
    text = matrix_text(lambda t: repr((1 - g * g) / (1 + g * g - 2 * g * math.cos(t)) ** 1.5), step)
    if read:
        assert measured_matrix("m.csv", text)[0].normalised_by == pytest.approx(1, rel=0.02 * step, abs=0)
    else:
        with pytest.raises(TableError, match=r'm\.csv, line 4, column "F11": F11 falls so steeply .* by 6\.3 %'):
            measured_matrix("m.csv", text)


def test_a_matrix_that_is_one_everywhere_has_mean_one():
    matrix, _ = measured_matrix("m.csv", matrix_text(lambda theta: "7"))
    assert matrix.normalised_by == pytest.approx(7, rel=1e-14, abs=0)


def test_elements_come_as_shares_with_either_sign_or_as_they_are():
    """The Rayleigh matrix: F11 = 3/4 (1 + cos²), F12 = −3/4 sin² (Bohren & Huffman 1983, section 5.2)."""
    f11, f12 = (lambda t: 0.75 * (1 + math.cos(t) ** 2)), (lambda t: -0.75 * math.sin(t) ** 2)
    shares = matrix_text(lambda t: f"{f11(t)!r},{f12(t) / f11(t)!r}", 1, "angle [deg],F11,F12/F11")
    turned = matrix_text(lambda t: f"{f11(t)!r},{-f12(t) / f11(t)!r}", 1, "angle [deg],F11,-F12/F11")
    whole = matrix_text(lambda t: f"{2 * f11(t)!r},{2 * f12(t)!r}", 1, "theta (deg),F11,F12")
    first, second, third = (measured_matrix("m.csv", text)[0] for text in (shares, turned, whole))
    assert second.f12 == pytest.approx(first.f12, rel=1e-12, abs=1e-15)
    assert third.f12 == pytest.approx(first.f12, rel=1e-12, abs=1e-15)
    assert third.normalised_by == pytest.approx(2 * first.normalised_by, rel=1e-14, abs=0)
    # At right angles the light is polarized in full, perpendicular to the scattering plane: F12 = −F11.
    assert first.f12[90] == pytest.approx(-first.f11[90], rel=1e-12, abs=0)


def test_angles_in_radians():
    text = "angle [rad],F11\n" + "".join(f"{math.pi * i / 60!r},1\n" for i in range(61))
    matrix, _ = measured_matrix("m.csv", text)
    assert matrix.angles[-1] == math.pi and len(matrix.angles) == 61


def test_a_whole_column_that_is_wrong_is_told_once_and_the_rest_is_cut_short():
    with pytest.raises(TableError) as caught:
        size_table("s.csv", "radius [um],dN/dlnr\n" + "x,y\n" * 50)
    assert len(caught.value.faults) == 2
    assert all("49 more rows of it likewise" in wrong for wrong, _ in caught.value.faults)
    header = ",".join(f"c{n}" for n in range(40))
    with pytest.raises(TableError) as caught:
        size_table("s.csv", f"{header}\n")
    assert len(caught.value.faults) == MOST_TOLD + 1 and "not listed" in caught.value.faults[-1][0]


def test_rows_are_bounded():
    with pytest.raises(TableError, match=f"has {MOST_ROWS + 1} rows"):
        size_table("s.csv", "radius [um],dN/dlnr\n" + "1,1\n" * (MOST_ROWS + 1))


JUNK = st.text(alphabet='0123456789.eE+-,;\t\n\r "#[]()umnradiusdN/lkF1 \x00\ud800λ', max_size=120)


@settings(max_examples=300, deadline=None)
@given(st.sampled_from([size_table, index_table, measured_matrix]), st.sampled_from(["", SIZES]), JUNK)
def test_junk_raises_nothing_but_its_own_error(make, before, junk):
    try:
        content, told = make("junk.csv", before + junk)
    except TableError as error:
        assert error.faults and all(wrong and mend for wrong, mend in error.faults)
    else:
        assert told and content


@settings(max_examples=50, deadline=None)
@given(st.lists(st.floats(1e-3, 1e3), min_size=2, max_size=40))
def test_a_table_written_from_a_curve_reads_back_as_the_same_curve(heights):
    radii = [0.05 * 1.1**i for i in range(len(heights))]
    rows = "".join(f"{radius!r},{height!r}\n" for radius, height in zip(radii, heights, strict=True))
    table, _ = size_table("sizes.csv", f"radius [um],dN/dlnr\n{rows}")
    assert table.radii == pytest.approx([radius * 1e-6 for radius in radii], rel=1e-15, abs=0)
    ratio = table.density[0] / heights[0]
    assert table.density == pytest.approx([ratio * height for height in heights], rel=1e-13, abs=0)


# --- Where files may be


def site(name: str) -> str:
    return changed(GOOD["good_catalogue"], [['file = "sizes.csv"', f'file = "{name}"']])


@pytest.fixture
def folder(tmp_path):
    here = tmp_path / "site"
    here.mkdir()
    for table in TABLES.iterdir():
        (here / table.name).write_bytes(table.read_bytes())
    return here


def test_files_in_a_folder_below_are_read_and_travel_with_the_scene(folder):
    (folder / "data").mkdir()
    (folder / "data" / "mine.csv").write_text(SIZES, encoding="utf-8")
    scene = read_text(site("data/mine.csv"), folder=folder)
    assert scene.files["data/mine.csv"] == SIZES
    assert set(scene.files) == {"counts.csv", "index.csv", "matrix.csv", "data/mine.csv"}


@pytest.mark.parametrize(
    ("link", "target"), [("way.csv", "outside.csv"), ("way", "."), ("way.csv", "/dev/zero"), ("way.csv", "way.csv")]
)
def test_links_do_not_lead_out(folder, link, target):
    (folder.parent / "outside.csv").write_text(SIZES, encoding="utf-8")
    os.symlink(target if target.startswith("/") or target == link else folder.parent / target, folder / link)
    name = link if link.endswith(".csv") else f"{link}/outside.csv"
    with pytest.raises(SiteError, match=r"leads out of|cannot be read|is not there"):
        read_text(site(name), folder=folder)


def test_a_link_within_the_folder_is_followed(folder):
    os.symlink(folder / "sizes.csv", folder / "same.csv")
    assert read_text(site("same.csv"), folder=folder).files["same.csv"].startswith("# Invented sizes")


@pytest.mark.parametrize("name", ["a/../../x.csv", "~/x.csv", "/x.csv", "..", "x\\u0000.csv", "x" * 300, "con/" * 60])
def test_names_that_are_refused(folder, name):
    with pytest.raises(SiteError) as caught:
        read_text(site(name), folder=folder)
    assert [problem.key for problem in caught.value.problems] == ['particles["fog with sizes"].sizes.file']


def test_files_are_bounded_alone_and_together(folder):
    (folder / "big.csv").write_text("#" * (LARGEST_TABLE + 1), encoding="utf-8")
    with pytest.raises(SiteError, match="too large"):
        read_text(site("big.csv"), folder=folder)
    rows = SIZES + "#" * (LARGEST_TABLE - len(SIZES))
    text = GOOD["good_catalogue"]
    for number in range(LARGEST_TOGETHER // LARGEST_TABLE):
        (folder / f"big{number}.csv").write_text(rows, encoding="utf-8")
        text += (f'[[particles]]\nname = "p{number}"\nindex = 1.5\nload = {{ number = "1 /cm^3" }}\n'
                 f'region = {{ shape = "everywhere" }}\n'
                 f'sizes = {{ shape = "table", file = "big{number}.csv" }}\n')  # fmt: skip
    with pytest.raises(SiteError, match="too large together"):
        read_text(text, folder=folder)


def test_another_encoding_is_named_with_the_file_and_its_line(folder):
    (folder / "latin.csv").write_bytes("radius [µm],dN/dlnr\n0.1,1\n".encode("latin-1"))
    with pytest.raises(SiteError, match=r"latin\.csv, line 1: the byte 0xb5 .* UTF-8"):
        read_text(site("latin.csv"), folder=folder)
    (folder / "wide.csv").write_text(SIZES, encoding="utf-16")
    with pytest.raises(SiteError, match=r"wide\.csv, line 1: the file is saved as UTF-16"):
        read_text(site("wide.csv"), folder=folder)


def test_a_file_used_twice_is_read_once_and_judged_for_each_use(folder):
    text = changed(site("index.csv"), [['"counts.csv"', '"index.csv"']])
    with pytest.raises(SiteError) as caught:
        read_text(text, folder=folder)
    assert [problem.key for problem in caught.value.problems if "wavelength [nm]" in problem.wrong] == [
        'particles["fog with sizes"].sizes.file', 'particles["counted drops"].sizes.file',
    ]  # fmt: skip


@pytest.mark.parametrize("unit", ["dB", "log10", "ln"])
def test_logarithms_are_no_values(folder, unit):
    text = (folder / "matrix.csv").read_text(encoding="utf-8").replace("F11", f"F11 [{unit}]", 1)
    (folder / "matrix.csv").write_text(text, encoding="utf-8")
    with pytest.raises(SiteError, match="logarithms"):
        read_text(GOOD["good_catalogue"], folder=folder)
