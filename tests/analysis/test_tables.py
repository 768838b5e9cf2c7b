"""Tables of the synthetic result hold the numbers that went in."""

import numpy as np
import pytest
from analysis.synthetic_result import plane_basin, sphere_basin, write_result

from swe.analysis.result import read_result
from swe.analysis.tables import Table, conservation, extremes, report, settings, stations, tables, work
from swe.constants import CAUTION


@pytest.fixture(scope="module", params=["plane", "sphere"])
def result(request, tmp_path_factory):
    return read_result(
        write_result(tmp_path_factory.mktemp("result"), {"plane": plane_basin, "sphere": sphere_basin}[request.param]())
    )


def test_settings(result):
    found = dict(settings(result).rows)
    assert found["begin"] == "2031-03-01 00:00" and found["last record of fields"] == "2031-03-01 04:00"
    assert found["faces"] == f"{result.basin.area.size:,}"
    assert found["time step by"] == "two-stage" and found["step"] == "120 s" and found["overlap"] == "6 layers"
    least, most = (4.0, 2000.0) if result.basin.spherical else (10.0, 50.0)
    assert found["depth"].startswith(f"{least:.1f} to {most:.1f} m, mean ")


def test_conservation(result):
    found = {row[0]: row[1:] for row in conservation(result).rows}
    assert found["kinetic energy (J)"] == ("0", "1.2e+13", "0", "1.2e+13")
    assert found["mass drift (1)"] == ("0.00e+00", "-8.00e-16", "-8.00e-16", "0.00e+00")
    assert found["mismatch (m)"] == ("0.00e+00", "1.00e-11", "0.00e+00", "1.00e-08")


def test_stations(result):
    west, east = stations(result).rows
    assert west[0] == "West Quay" and west[2:4] == ("0.080", "2031-03-01 04:00")
    assert east[0] == "East Quay" and east[4:6] == ("-0.080", "2031-03-01 04:00")
    if result.basin.spherical:
        assert west[1].startswith("lon 179.0") and east[1].startswith("lon -178.")
    else:
        assert west[1] == "x 0.00, y 0.00 km"


def test_extremes(result):
    table = extremes(result)
    found = {row[0]: row[1:] for row in table.rows}
    assert "2031-03-01 00:00 to 2031-03-01 04:00" in table.title
    assert found["highest level (m)"][0] == "0.080" and found["highest level (m)"][3] == "2031-03-01 04:00"
    assert found["lowest level (m)"][0] == "-0.080"
    assert found["largest speed (m/s)"][0] == "0.400"
    assert float(found["highest level (m)"][2]) == pytest.approx(result.basin.depth.min(), abs=0.05)


def test_work(result):
    found = dict(work(result).rows)
    assert found["products of the operator"] == "2,000 (16.7 a step)"
    assert found["speed"] == "1,200 x real time"
    assert found["share of products"] == "55.0 %" and found["share of exchange"] == "15.0 %"
    shares = [float(value.rstrip(" %")) for name, value in found.items() if name.startswith("share")]
    assert sum(shares) == pytest.approx(100.0)


def test_report_has_all_tables_the_case_and_the_caution(result):
    for text in (report(result.folder), report(result.folder, markdown=True)):
        assert text.endswith(f"{CAUTION}\n")
        for title in ("Settings", "Conservation and agreement", "Stations", "Extremes", "Work"):
            assert title in text
    assert '```toml\ntitle = "Test basin"\n```' in text


def test_unfinished_result_says_so(tmp_path):
    folder = write_result(tmp_path, plane_basin(), records=0, names=("level",), finished=False)
    assert "not finished" in report(folder)
    assert [table.title for table in tables(read_result(folder))] == ["Settings"]


def test_markdown_and_text_show_the_same_cells():
    table = Table("T", ("a", "bb (m)"), (("1", "22"), ("333", "4")))
    assert table.markdown() == "## T\n\n| a | bb (m) |\n| --- | --- |\n| 1 | 22 |\n| 333 | 4 |\n"
    assert table.text() == "T\n-\na    bb (m)\n1    22\n333  4\n"


def test_area_weights_the_mean_depth(result):
    shown = float(dict(settings(result).rows)["depth"].split("mean ")[1].split(" m")[0])
    basin = result.basin
    assert shown == pytest.approx(np.average(basin.depth, weights=basin.area), abs=0.06)
