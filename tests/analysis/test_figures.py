"""Figures of a small synthetic result: they are made, they show something, and their axes carry units."""

import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from analysis.synthetic_result import plane_basin, sphere_basin, write_result
from matplotlib.figure import Figure
from matplotlib.image import imread
from matplotlib.quiver import QuiverKey
from matplotlib.text import Text

from swe.analysis.figures import NAMES, draw, draw_all
from swe.analysis.figures import page as page_module
from swe.analysis.figures.depth import passage_window
from swe.analysis.figures.levels import arrow_faces, snapshot_records, weighted_quantile
from swe.analysis.figures.work import phase_table
from swe.analysis.result import read_result
from swe.constants import CAUTION
from swe.errors import FileError

UNITS = {
    "depth": ("depth below the datum (m)", "spacing of face centres (km)", "number of faces"),
    "highest-level": ("highest level above the datum (m)", "when it came (h)"),
    "snapshots": ("water level above the datum (m)", "m/s"),
    "stations": ("level (m)", "speed (m/s)", "time (UTC)"),
    "ledger": (
        "mass drift over mass at the start (1)",
        "energy (TJ)",
        "difference as a level (m)",
        "products per model hour (1/h)",
    ),
    "work": ("wall time (s)", "rank"),
}


@pytest.fixture(scope="module", params=["plane", "sphere"])
def drawn(request, tmp_path_factory):
    """Draw all figures once; return the folder, the paths and the texts of each figure."""
    folder = write_result(
        tmp_path_factory.mktemp("result") / "case", {"plane": plane_basin, "sphere": sphere_basin}[request.param]()
    )
    texts, write = {}, Figure.savefig

    def listening(figure, path, **options):
        write(figure, path, **options)  # ticks get their texts when they are drawn
        texts[Path(path).stem] = [text.get_text() for text in figure.findobj(Text)]
        texts[Path(path).stem] += [key.text.get_text() for key in figure.findobj(QuiverKey)]

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Figure, "savefig", listening)
        paths = draw_all(folder)
    return folder, paths, texts


def test_all_figures_are_there_in_order(drawn):
    folder, paths, _ = drawn
    assert [path.stem for path in paths] == list(NAMES)
    assert all(path.parent == folder / "figures" and path.is_file() for path in paths)


def test_pictures_have_size_and_content(drawn):
    _, paths, _ = drawn
    for path in paths:
        pixels = imread(path)[:, :, :3]
        height, width = pixels.shape[:2]
        assert 1300 <= width <= 2000 and 300 <= height <= 3000, path
        assert pixels.std() > 0.05, f"{path} is nearly blank"
        # content in every quarter of the height, so that no panel is missing
        for part in np.array_split(pixels, 4):
            assert part.std() > 0.02, path


def test_axes_carry_units(drawn):
    _, _, texts = drawn
    for name, wanted in UNITS.items():
        for text in wanted:
            assert any(text in found for found in texts[name]), f"{name}: {text!r} not among {texts[name]}"


def test_title_and_caution_on_every_figure(drawn):
    _, _, texts = drawn
    for name, found in texts.items():
        assert any(text.startswith("Test basin: a mode that grows\n") for text in found), name
        assert any(text.replace("\n", " ") == CAUTION for text in found), name


def test_plane_axes_are_in_kilometres_and_sphere_axes_in_degrees(drawn):
    folder, _, texts = drawn
    spherical = read_result(folder).basin.spherical
    assert ("x (km)" in texts["depth"]) == (not spherical)
    assert any("° N" in text for text in texts["depth"]) == spherical
    if spherical:  # this basin lies across the date line
        assert {text[-1:] for text in texts["depth"] if "°" in text} == {"N", "E", "W"}


def test_maps_keep_true_shape():
    basin = _Box(True, (10.0, 58.0, 12.0, 62.0))
    axes = Figure().subplots()
    page_module.dress_map(axes, basin)
    assert axes.get_aspect() == pytest.approx(2.0, rel=1e-3)  # 1 / cos 60
    axes = Figure().subplots()
    page_module.dress_map(axes, _Box(False, (0.0, 0.0, 1e4, 2e4)))
    assert axes.get_aspect() == 1.0


class _Box:
    def __init__(self, spherical, box):
        self.spherical, self.box = spherical, box


def test_the_users_style_is_left_alone(tmp_path):
    import matplotlib

    folder = write_result(tmp_path / "case", plane_basin())
    with matplotlib.rc_context({"font.size": 31.0, "text.usetex": True}):
        before = dict(matplotlib.rcParams)
        draw(read_result(folder), "work", tmp_path)
        assert dict(matplotlib.rcParams) == before


def test_a_result_without_records_still_shows_its_mesh(tmp_path):
    folder = write_result(tmp_path / "case", plane_basin(), records=0, names=("level", "velocity"), finished=False)
    assert [path.stem for path in draw_all(folder)] == ["depth"]


def test_an_unfinished_result_shows_what_is_there(tmp_path):
    folder = write_result(tmp_path / "case", plane_basin(), records=2, finished=False, names=("level",))
    assert [path.stem for path in draw_all(folder)] == ["depth", "highest-level", "snapshots", "stations", "ledger"]


def test_only_fields_are_needed(tmp_path):
    folder = write_result(tmp_path / "case", plane_basin())
    for name in ("stations.nc", "ledger.nc", "summary.json"):
        (folder / name).unlink()
    assert [path.stem for path in draw_all(folder, tmp_path / "elsewhere")] == ["depth", "highest-level", "snapshots"]
    assert (tmp_path / "elsewhere" / "depth.png").is_file() and not (folder / "figures").exists()


def test_a_still_basin_and_one_subdomain_can_be_drawn(tmp_path):
    """Level 0 everywhere, no mismatch: scales must not collapse (warnings are errors)."""
    folder = write_result(tmp_path / "case", plane_basin(), records=1, subdomains=1)
    assert [path.stem for path in draw_all(folder)] == ["depth", "highest-level", "snapshots", "work"]


def test_no_folder_is_a_file_error(tmp_path):
    with pytest.raises(FileError, match="no such folder"):
        draw_all(tmp_path / "nothing")
    with pytest.raises(FileError, match="fields.nc: no such file"):
        draw_all(tmp_path)


def test_folder_that_cannot_be_written_is_named(tmp_path):
    folder = write_result(tmp_path / "case", plane_basin())
    (tmp_path / "figures").write_text("a file where the folder should be")
    with pytest.raises(FileError, match="work.png: the figure cannot be written"):
        draw(read_result(folder), "work", tmp_path / "figures")


def test_matplotlib_is_not_loaded_before_a_figure_is_drawn():
    code = "import sys, swe.analysis.figures, swe.analysis.tables; sys.exit('matplotlib' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], cwd=Path(__file__).parents[2]).returncode == 0


def test_snapshots_end_with_the_last_record():
    assert snapshot_records(49) == [12, 24, 36, 48]
    assert snapshot_records(3) == [0, 1, 2]
    assert snapshot_records(5)[-1] == 4


def test_colours_of_the_snapshots_cover_the_area_and_not_the_number_of_faces():
    values, areas = np.array([5.0, 1.0, 3.0, 9.0]), np.array([1.0, 6.0, 2.0, 1.0])
    assert [weighted_quantile(values, areas, part) for part in (0.5, 0.6, 0.7, 0.8, 0.9, 0.95, 1.0)] == [1, 1, 3, 3, 5, 9, 9]


def test_close_view_shows_the_strait_of_the_island(tmp_path):
    """The island of the synthetic basin lies nearer to the south coast."""
    basin = read_result(write_result(tmp_path / "case", plane_basin())).basin
    x, y = basin.passage()
    assert 14e3 < x < 22e3 and -1.2e3 < y < 5e3
    west, south, east, north = passage_window(basin)
    assert west < x < east and south < y < north


def test_arrows_are_thinned_to_one_a_square(tmp_path, monkeypatch):
    basin = read_result(write_result(tmp_path / "case", plane_basin())).basin
    monkeypatch.setattr("swe.analysis.figures.levels.ARROWS_ACROSS", 6)
    chosen = arrow_faces(basin)
    assert 12 <= len(chosen) <= 36 and len(set(chosen)) == len(chosen)


def test_phases_missing_on_a_rank_count_as_nothing():
    names, seconds = phase_table([{"a": 1.0, "b": 5.0}, {"b": 1.0, "c": 2.0}])
    assert names == ["b", "c", "a"]
    assert seconds.tolist() == [[5.0, 0.0, 1.0], [1.0, 2.0, 0.0]]
