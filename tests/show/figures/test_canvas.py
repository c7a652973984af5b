"""The drawing surface: nothing from outside changes a picture, nothing of ours stays behind, user text stays text."""

from __future__ import annotations

import hashlib
import io
import os
import subprocess
import sys
import xml.etree.ElementTree as ET
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from soacheck.show import figures
from soacheck.show.figures import canvas
from tests.show.figures import build

ROOT = Path(__file__).parents[3]
HOSTILE = (
    "$x_1$",
    "_hidden",
    "<script>alert(1)</script>",
    "a $5 & $6",
    "$$",
    r"$\frac{1}$",
    r"\$ and \\$",
    "{" * 300,
    "}$_$^",
    "line\nbreak\ttab\x00\x1b[31m",
    "\u202eright to left\u2066",
    "\ud800 surrogate",
    "\ufffe and \U0001f4a5 and 電力",
    "W" * 500,
    "%d %s {0}",
    "",
)

SUM_ALL = """
import hashlib
from soacheck.show import figures
from tests.show.figures import build
for result in (build.held_line(title="a $5 & $6"), build.push_pull(complement=False)):
    for name in figures.NAMES:
        for half in figures.halves(result):
            for fmt in figures.FORMATS:
                data = figures.rendered(result, name, half, fmt=fmt)
                print(name, half, fmt, hashlib.sha256(data).hexdigest())
"""


def run(code: str, folder: Path, **environment: str) -> str:
    env = {**os.environ, "PYTHONPATH": str(ROOT), **environment}
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", code], cwd=folder, env=env, capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


def test_two_processes_give_the_same_bytes_whatever_lies_about(tmp_path: Path) -> None:
    tidy, messy = tmp_path / "tidy", tmp_path / "messy"
    tidy.mkdir()
    messy.mkdir()
    (messy / "matplotlibrc").write_text(
        "text.usetex: True\nlines.linewidth: 9\nfont.size: 30\nsvg.fonttype: none\naxes.grid: True\n"
    )
    first = run(SUM_ALL, tidy, PYTHONHASHSEED="1")
    second = run(SUM_ALL, messy, PYTHONHASHSEED="2", MPLBACKEND="nonsense", TZ="Asia/Tokyo", COLUMNS="31")
    assert first.count("\n") == 4 * 3 * 2  # pictures x formats x results
    assert first == second


def test_importing_the_pictures_loads_no_matplotlib(tmp_path: Path) -> None:
    code = "import sys, soacheck.show.figures; print([m for m in sys.modules if m.partition('.')[0] == 'matplotlib'])"
    assert run(code, tmp_path).strip() == "[]"


def test_drawing_never_loads_pyplot(tmp_path: Path) -> None:
    code = (
        "import sys\nfrom soacheck.show import figures\nfrom tests.show.figures import build\n"
        "figures.rendered(build.held_line(), 'safe-area', fmt='pdf')\n"
        "print([m for m in sys.modules if 'pyplot' in m])"
    )
    assert run(code, tmp_path).strip() == "[]"


@pytest.mark.parametrize("backend", ["svg", "nonsense"])
def test_the_backend_that_the_user_chose_is_left_alone(tmp_path: Path, backend: str) -> None:
    code = (
        "import os\nfrom soacheck.show import figures\nfrom tests.show.figures import build\n"
        "figures.rendered(build.held_line(), 'line')\nimport matplotlib\n"
        "print(os.environ['MPLBACKEND'], dict.__getitem__(matplotlib.rcParams, 'backend'))"
    )
    variable, in_force = run(code, tmp_path, MPLBACKEND=backend).split(maxsplit=1)
    assert variable == backend
    assert (in_force.strip() == backend) == (backend == "svg")


def test_a_settings_file_that_is_not_text_is_an_output_error_with_a_way_out(tmp_path: Path) -> None:
    (tmp_path / "matplotlibrc").write_bytes(b"font.size: 9\n\xff\xfe\x00")
    code = (
        "from soacheck.errors import OutputError\nfrom soacheck.show import figures\n"
        "from tests.show.figures import build\n"
        "try:\n    figures.rendered(build.held_line(), 'line')\n"
        "except OutputError as error:\n    print(error)"
    )
    assert "matplotlibrc" in run(code, tmp_path)


def test_the_settings_of_a_program_that_draws_with_us_stay_its_own() -> None:
    import matplotlib as mpl

    with mpl.rc_context({"lines.linewidth": 7.0, "font.size": 23.0, "svg.hashsalt": "mine"}):
        before = dict(mpl.rcParams)
        figures.rendered(build.held_line(), "line", fmt="svg")
        assert dict(mpl.rcParams) == before


@pytest.mark.parametrize("text", HOSTILE)
@pytest.mark.parametrize("fmt", figures.FORMATS)
def test_hostile_titles_are_drawn_as_text(text: str, fmt: str) -> None:
    data = figures.rendered(build.held_line(title=text), "line", fmt=fmt)
    if fmt == "svg":
        root = ET.fromstring(data)  # well-formed
        assert not [node for node in root.iter() if node.tag.endswith(("script", "}a", "image"))]


def drawn(text: str, **how: bool) -> bytes:
    with canvas.settings():
        figure = canvas.new_figure(1.0)
        figure.text(0.02, 0.4, text, **how)
    return canvas.rendered(figure, "png")


@pytest.mark.parametrize("text", ["$x_1$", "_hidden", "<script>", "a $5 & $6", r"\$ and \\$", r"$\alpha$", "{}^_%"])
def test_plain_text_looks_as_matplotlib_draws_it_with_formulas_switched_off(text: str) -> None:
    # Second way: parse_math=False draws the characters themselves.
    assert drawn(canvas.plain(text)) == drawn(text, parse_math=False)


@settings(max_examples=60, deadline=None)
@given(st.text(max_size=120))
def test_any_text_can_be_measured_and_stays_on_one_line(text: str) -> None:
    shown = canvas.plain(text)
    assert len(shown.replace(r"\$", "$")) <= canvas.LONGEST
    assert shown == shown.strip()
    assert all(sign.isprintable() for sign in shown)
    with canvas.settings():
        figure = canvas.new_figure(1.0)
        extent = figure.text(0, 0, shown).get_window_extent(canvas.renderer_of(figure))
    assert extent.width >= 0


def test_a_long_text_is_capped_with_a_sign_that_says_so() -> None:
    assert canvas.plain("x" * 81) == "x" * 79 + "…"
    assert canvas.plain("x" * 80) == "x" * 80


@pytest.mark.parametrize("fmt", figures.FORMATS)
def test_a_picture_carries_no_date_and_no_program_version(fmt: str) -> None:
    data = figures.rendered(build.held_line(), "line", fmt=fmt)
    for trace in (b"Matplotlib", b"matplotlib v", b"<dc:date>", b"CreationDate", b"Software"):
        assert trace not in data, trace


def test_the_kinds_of_file_are_what_they_say() -> None:
    starts = {"png": b"\x89PNG", "svg": b"<?xml", "pdf": b"%PDF"}
    for fmt, start in starts.items():
        assert figures.rendered(build.held_line(), "line", fmt=fmt).startswith(start)


def test_a_figure_drawn_twice_in_one_process_gives_the_same_bytes() -> None:
    sums = {hashlib.sha256(figures.rendered(build.push_pull(), "safe-area", "upper")).hexdigest() for _ in range(2)}
    assert len(sums) == 1


def test_a_returned_figure_can_be_saved_by_the_caller() -> None:
    target = io.BytesIO()
    figures.draw(build.held_line(), "temperature").savefig(target, format="png")
    assert target.getvalue().startswith(b"\x89PNG")
