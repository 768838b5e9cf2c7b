"""Depth from grids, soundings and constants, and every sentence that refuses one.

Sources: a bilinear function a + bx + cy + dxy is reproduced by bilinear interpolation, a linear one by linear interpolation on
triangles, exactly; attributes after the CF conventions 1.11.
"""

import netCDF4
import numpy as np
import pytest
import shapely
from waters import degrees, lake

from swe.constants import EARTH_RADIUS
from swe.errors import InputError
from swe.mesh.bed import read_grid
from swe.mesh.depth import ConstantBed, depth_at
from swe.mesh.soundings import read_soundings
from swe.mesh.surface import Plane, Sphere

SPHERE = Sphere(EARTH_RADIUS)
BOX = shapely.box(0, 0, 1000, 800)
RNG = np.random.default_rng(3)
PLACES = RNG.uniform(0, 1, (200, 2)) * [1000, 800]


def slope(x, y):
    """A depth that is bilinear in m."""
    return 20 + 0.01 * x + 0.02 * y + 1e-5 * x * y


def grid(
    path, x, y, values, names=("x", "y", "depth"), axes=None, attributes=None, dimensions="yx", kind="f8", **packing
):  # fmt: skip
    """Write a small grid file; `axes` are the attributes of x and y, `attributes` those of the variable."""
    axes = axes if axes is not None else [{"standard_name": f"projection_{letter}_coordinate"} for letter in "xy"]
    with netCDF4.Dataset(path, "w") as file:
        for name, axis, found in zip(names, (x, y), axes):
            file.createDimension(name, len(axis))
            variable = file.createVariable(name, "f8", (name,))
            variable.setncatts(found)
            variable[:] = axis
        order = tuple(names[0] if letter == "x" else names[1] for letter in dimensions)
        variable = file.createVariable(names[2], kind, order, fill_value=packing.pop("fill_value", None))
        variable.setncatts({"positive": "down", "units": "m"} if attributes is None else attributes)
        variable.setncatts(packing)
        variable[:] = values if dimensions == "yx" else np.ma.transpose(values)
    return path


def on(x, y, function=slope):
    return function(*np.meshgrid(x, y))


X, Y = np.linspace(-50, 1050, 23), np.linspace(-50, 850, 19)


def refused(read, *arguments, **named):
    with pytest.raises(InputError) as caught:
        read(*arguments, **named)
    assert str(caught.value).startswith(str(arguments[0])) and "\n" not in str(caught.value)
    return str(caught.value)


@pytest.mark.parametrize("dimensions", ["yx", "xy"])
@pytest.mark.parametrize("flip", [1, -1])
def test_grid_is_bilinear_in_any_order_of_dimensions_and_rows(tmp_path, dimensions, flip):
    path = grid(tmp_path / "d.nc", X, Y[::flip], on(X, Y[::flip]), dimensions=dimensions)
    depth, guessed = read_grid(path, Plane(), BOX).at(PLACES)
    assert depth == pytest.approx(slope(*PLACES.T), rel=1e-12) and not guessed.any()


@pytest.mark.parametrize(
    "attributes, sign",
    [
        ({"positive": "up"}, -1),
        ({"standard_name": "altitude"}, -1),
        ({"standard_name": "surface_altitude", "units": "m"}, -1),
        ({"standard_name": "sea_floor_depth_below_geoid"}, 1),
        ({"standard_name": "altitude", "positive": "down"}, 1),
    ],
)
def test_direction_from_attributes(tmp_path, attributes, sign):
    path = grid(tmp_path / "d.nc", X, Y, sign * on(X, Y), ("x", "y", "band"), attributes=attributes)
    assert read_grid(path, Plane(), BOX).at(PLACES)[0] == pytest.approx(slope(*PLACES.T), rel=1e-12)


@pytest.mark.parametrize("name, sign", [("depth", 1), ("Bathymetry", 1), ("elevation", -1)])
def test_direction_from_the_name_where_attributes_are_silent(tmp_path, name, sign):
    path = grid(tmp_path / "d.nc", X, Y, sign * on(X, Y), ("x", "y", name), attributes={})
    assert read_grid(path, Plane(), BOX).at(PLACES)[0] == pytest.approx(slope(*PLACES.T), rel=1e-12)


def test_units_of_depth_and_coordinates(tmp_path):
    axes = ({"axis": "X", "units": "km"}, {"axis": "Y", "units": "km"})
    feet = {"positive": "down", "units": "ft"}
    path = grid(tmp_path / "d.nc", X / 1000, Y / 1000, on(X, Y) / 0.3048, ("e", "n", "depth"), axes, feet)
    assert read_grid(path, Plane(), BOX).at(PLACES)[0] == pytest.approx(slope(*PLACES.T), rel=1e-9)


def test_packed_values(tmp_path):
    depth = np.round(on(X, Y))
    path = tmp_path / "d.nc"
    with netCDF4.Dataset(grid(path, X, Y, depth, kind="i2", scale_factor=0.5, add_offset=10.0), "r") as file:
        assert file["depth"].scale_factor == 0.5
    assert np.abs(read_grid(path, Plane(), BOX).at(PLACES)[0] - slope(*PLACES.T)).max() < 1.0


def test_extra_dimension_of_one_and_named_variable(tmp_path):
    path = grid(tmp_path / "d.nc", X, Y, on(X, Y))
    with netCDF4.Dataset(path, "a") as file:
        file.createDimension("time", 1)
        other = file.createVariable("soundings_mean", "f8", ("time", "y", "x"))
        other.positive = "up"
        other[:] = -2 * on(X, Y)[None]
    assert "depth, soundings_mean all look like depth" in refused(read_grid, path, Plane(), BOX)
    assert read_grid(path, Plane(), BOX, "soundings_mean").at(PLACES)[0] == pytest.approx(2 * slope(*PLACES.T), rel=1e-12)
    assert "no variable 'level'" in refused(read_grid, path, Plane(), BOX, variable="level")


@pytest.mark.parametrize("start, middle", [(0, 359.2), (-180, -0.8), (0, 180.3), (-180, -179.7), (-180, 100), (0, -100)])
@pytest.mark.parametrize("flip", [1, -1])
def test_either_convention_of_longitude(tmp_path, start, middle, flip):
    """A global grid serves basins across Greenwich and the date line; a smooth periodic depth leaves interpolation error only."""

    def depth(lon, lat):
        return 50 + 10 * np.cos(np.radians(lon)) + 0.1 * lat

    lon, lat = np.arange(start, start + 360, 0.5)[::flip], np.arange(-90, 90.1, 0.5)
    axes = ({"units": "degrees_east"}, {"units": "degrees_north"})
    path = grid(tmp_path / "d.nc", lon, lat, on(lon, lat, depth), ("lon", "lat", "depth"), axes)
    water = degrees(lake(100e3), (middle, 40.0))
    points = RNG.uniform(-1, 1, (100, 2)) + [middle, 40.0]
    bed = read_grid(path, SPHERE, water)
    assert bed.x.size < 20, "only the window is read"
    for turn in (0, 360, -360):
        assert np.abs(bed.at(points + [turn, 0])[0] - depth(*points.T)).max() < 1e-3


def test_missing_values_and_land_take_the_nearest_wet_depth_and_are_counted(tmp_path):
    depth = np.full((len(Y), len(X)), 30.0)
    depth[:, X > 600] = 12.0
    depth[:, X > 800] = -3.0
    values = np.ma.masked_where(np.broadcast_to(X > 900, depth.shape), depth)
    bed = read_grid(grid(tmp_path / "d.nc", X, Y, values, fill_value=-9999.0), Plane(), BOX)
    places = np.array([[300.0, 400.0], [750, 400], [950, 400], [990, 10]])
    depth, report = depth_at(bed, places, 5.0)
    assert depth == pytest.approx([30, 12, 12, 12]) and report.guessed == 2 and report.deepened == 0
    assert "2 of 4 faces (50.0 %) rest in part on grid points without water" in " ".join(report.lines())


def test_nearest_is_nearest_on_the_ground(tmp_path):
    """At latitude 80 a degree of longitude is 19 km: the wet point 3 degrees east is nearer than the one 1 degree north."""
    lon, lat = np.arange(0.0, 11), np.arange(76.0, 85)
    depth = np.full((9, 11), np.nan)
    depth[5, 5], depth[4, 8] = 100.0, 7.0
    axes = ({"units": "degrees_east"}, {"units": "degrees_north"})
    path = grid(tmp_path / "d.nc", lon, lat, depth, ("lon", "lat", "depth"), axes)
    bed = read_grid(path, SPHERE, shapely.box(3, 78, 7, 82))
    assert bed.at(np.array([[5.0, 80.0]]))[0] == pytest.approx(7.0)


def test_missing_grid(tmp_path):
    assert "no such file" in refused(read_grid, tmp_path / "none.nc", Plane(), BOX)


def test_not_netcdf_and_cut_short(tmp_path):
    text = tmp_path / "text.nc"
    text.write_text("depth")
    assert "not a netCDF file" in refused(read_grid, text, Plane(), BOX)
    whole = grid(tmp_path / "d.nc", X, Y, on(X, Y))
    cut = tmp_path / "cut.nc"
    cut.write_bytes(whole.read_bytes()[: whole.stat().st_size // 2])
    assert "cut short" in refused(read_grid, cut, Plane(), BOX)


def test_no_variable_that_looks_like_depth(tmp_path):
    path = grid(tmp_path / "d.nc", X, Y, on(X, Y), ("x", "y", "salt"), attributes={"units": "1"})
    assert "no variable looks like depth; found salt" in refused(read_grid, path, Plane(), BOX)
    assert "does not tell up from down" in refused(read_grid, path, Plane(), BOX, variable="salt")


def test_no_coordinates_and_those_of_the_other_surface(tmp_path):
    path = grid(tmp_path / "d.nc", X, Y, on(X, Y), ("a", "b", "depth"), axes=({}, {}))
    text = refused(read_grid, path, Plane(), BOX)
    assert "no one-dimensional coordinates projection_x_coordinate (x)" in text and "found a, b, depth" in text
    axes = ({"units": "degrees_east"}, {"units": "degrees_north"})
    path = grid(tmp_path / "e.nc", np.linspace(0, 9, 23), np.linspace(0, 9, 19), on(X, Y), ("lon", "lat", "depth"), axes)
    assert "the other surface" in refused(read_grid, path, Plane(), BOX)


def test_coordinate_that_turns_back(tmp_path):
    x = X.copy()
    x[5] = x[3]
    assert "x is neither rising nor falling" in refused(read_grid, grid(tmp_path / "d.nc", x, Y, on(x, Y)), Plane(), BOX)


def test_unknown_unit(tmp_path):
    path = grid(tmp_path / "d.nc", X, Y, on(X, Y), attributes={"positive": "down", "units": "fathom"})
    assert "unit 'fathom' of depth" in refused(read_grid, path, Plane(), BOX)


def test_basin_not_covered_names_both_boxes_and_the_side(tmp_path):
    path = grid(tmp_path / "d.nc", X[:12], Y[4:], on(X[:12], Y[4:]))
    text = refused(read_grid, path, Plane(), BOX)
    assert "in the south and east" in text
    assert "grid x -50 to 500, y 150 to 850 m" in text and "basin x 0 to 1000, y 0 to 800 m" in text


def test_half_a_step_beyond_the_grid_is_covered(tmp_path):
    x, y = np.arange(20, 1000, 40.0), np.arange(20, 800, 40.0)
    depth, _ = read_grid(grid(tmp_path / "d.nc", x, y, on(x, y)), Plane(), BOX).at(np.array([[0.0, 0.0]]))
    assert depth == pytest.approx(slope(20, 20))


def test_swapped_grid(tmp_path):
    axes = ({"units": "degrees_east"}, {"units": "degrees_north"})
    lon, lat = np.linspace(50, 60, 21), np.linspace(0, 14, 29)
    path = grid(tmp_path / "d.nc", lon, lat, np.full((29, 21), 9.0), ("lon", "lat", "depth"), axes)
    assert "longitude and latitude look swapped" in refused(read_grid, path, SPHERE, degrees(lake(), (7.0, 55.0)))


def test_gap_at_the_date_line(tmp_path):
    axes = ({"units": "degrees_east"}, {"units": "degrees_north"})
    lon, lat = np.linspace(-170, 170, 341), np.linspace(40, 60, 21)
    path = grid(tmp_path / "d.nc", lon, lat, np.full((21, 341), 9.0), ("lon", "lat", "depth"), axes)
    assert "leaves a gap from" in refused(read_grid, path, SPHERE, shapely.box(165, 45, 195, 55))


def test_land_everywhere(tmp_path):
    path = grid(tmp_path / "d.nc", X, Y, -on(X, Y))
    assert "no water in the basin (greatest depth -18.5" in refused(read_grid, path, Plane(), BOX)
    path = grid(tmp_path / "e.nc", X, Y, np.full((len(Y), len(X)), np.nan))
    assert "all values are missing" in refused(read_grid, path, Plane(), BOX)


def test_least_depth_is_applied_and_counted():
    class Ramp:
        source, guess = "a ramp", ""

        def at(self, points):
            return points[:, 0], np.zeros(len(points), dtype=bool)

    depth, report = depth_at(Ramp(), np.array([[1.0, 0], [5, 0], [10, 0], [-4, 0]]), 5.0)
    assert depth.tolist() == [5, 5, 10, 5]
    assert (report.deepened, report.faces, report.shallowest, report.deepest, report.mean) == (2, 4, 5, 10, 6.25)
    assert "2 of 4 faces (50.0 %) deepened to the least depth 5 m" in report.lines()[-1]
    assert report.as_dict()["deepened"] == 2
    with pytest.raises(InputError, match="shallower than the least depth 20 m in the whole basin"):
        depth_at(Ramp(), np.array([[1.0, 0]]), 20.0)
    for wrong in (0.0, -1.0, np.nan):
        with pytest.raises(InputError, match="least depth"):
            depth_at(Ramp(), np.array([[30.0, 0]]), wrong)


def test_constant():
    assert ConstantBed(12.5).at(PLACES)[0].tolist() == [12.5] * len(PLACES)
    for wrong in (0, -3.0, np.inf):
        with pytest.raises(InputError, match="positive down"):
            ConstantBed(wrong)


def csv(tmp_path, text):
    path = tmp_path / "soundings.csv"
    path.write_text(text)
    return path


def test_soundings_are_linear_inside_and_nearest_outside(tmp_path):
    points = np.vstack([RNG.uniform(200, 600, (80, 2)), [[200, 200], [600, 200], [200, 600], [600, 600]]])
    rows = "\n".join(f"{5 + 0.01 * x - 0.002 * y!r},note,{x!r},{y!r}" for x, y in points.tolist())
    bed = read_soundings(csv(tmp_path, f"# survey of an invented lake\nDepth, remark ,X,y\n\n{rows}\n"), Plane(), BOX)
    inside = RNG.uniform(200, 600, (50, 2))
    depth, guessed = bed.at(inside)
    assert depth == pytest.approx(5 + 0.01 * inside[:, 0] - 0.002 * inside[:, 1], rel=1e-9) and not guessed.any()
    depth, report = depth_at(bed, np.array([[400.0, 400], [900, 700]]), 1.0)
    assert depth[1] == pytest.approx(5 + 6 - 1.2) and report.guessed == 1
    assert "1 of 2 faces (50.0 %) lie outside the hull of the soundings" in " ".join(report.lines())


def test_soundings_on_the_sphere_by_either_convention(tmp_path):
    path = csv(tmp_path, "longitude,latitude,depth\n359,54,10\n1,54,20\n359,56,10\n1,56,20\n")
    bed = read_soundings(path, SPHERE, degrees(lake(), (0.0, 55.0)))
    depth, guessed = bed.at(np.array([[0.0, 55.0], [360.5, 55.0]]))
    # Triangles are straight in the chart, where parallels are curved: linear in longitude but for 0.1 m of the 10 m.
    assert depth == pytest.approx([15.0, 17.5], abs=0.2) and not guessed.any()


@pytest.mark.parametrize(
    "text, said",
    [
        ("", ": empty"),
        ("# only a remark\n", ": empty"),
        ("x,y\n1,2\n", ", line 1: header x,y; needed are the columns x,y,depth"),
        ("lon,lat,depth\n1,2,3\n", ", line 1: header lon,lat,depth"),
        ("x,y,depth\n1,2,3\n4,5\n", ", line 3: 2 fields where the header has 3"),
        ("x,y,depth\n1,2,3\n\n4,five,6\n", ", line 4: y is 'five'"),
        ("x,y,depth\n1,2,nan\n", ", line 2: depth is 'nan'"),
        ("x,y,depth\n1,2,3\n1,3,3\n", "holds 2 soundings"),
        ("x,y,depth\n1,1,3\n2,2,3\n3,3,3\n", "lie on one line"),
        ("x,y,depth\n1,1,-3\n2,7,-3\n3,3,-2\n", "no depth is above 0"),
        ("x,y,depth\n5000,1,3\n5002,7,3\n5003,3,3\n", "lie apart from the basin (x 0 to 1000, y 0 to 800 m)"),
    ],
)
def test_soundings_that_are_refused(tmp_path, text, said):
    assert said in refused(read_soundings, csv(tmp_path, text), Plane(), BOX)


def test_missing_soundings(tmp_path):
    assert "no such file" in refused(read_soundings, tmp_path / "none.csv", Plane(), BOX)


def test_soundings_swapped_or_no_place(tmp_path):
    basin = degrees(lake(), (7.0, 55.0))
    path = csv(tmp_path, "lon,lat,depth\n54.9,6.9,10\n55.1,6.9,10\n55,7.1,10\n")
    assert "longitude and latitude look swapped" in refused(read_soundings, path, SPHERE, basin)
    path = csv(tmp_path, "lon,lat,depth\n7,55,10\n55,107,10\n")
    assert ", line 3: longitude 55, latitude 107 is no place: longitude and latitude look swapped" in refused(
        read_soundings, path, SPHERE, basin
    )
    path = csv(tmp_path, "lon,lat,depth\n500,107,10\n")
    assert "latitudes -90 to 90" in refused(read_soundings, path, SPHERE, basin)


def test_an_undeclared_mark_for_no_value_is_refused(tmp_path):
    path = tmp_path / "depth.nc"
    x = np.linspace(0.0, 10e3, 21)
    with netCDF4.Dataset(path, "w") as dataset:
        for axis in ("x", "y"):
            dataset.createDimension(axis, x.size)
            variable = dataset.createVariable(axis, "f8", (axis,))
            variable.setncatts({"standard_name": f"projection_{axis}_coordinate", "units": "m"})
            variable[:] = x
        height = dataset.createVariable("height", "f4", ("y", "x"))
        height.setncatts({"units": "m", "positive": "up", "long_name": "height above the datum"})
        values = np.full((x.size, x.size), -20.0)
        values[3, 4] = -9999.0
        height[:] = values
    with pytest.raises(
        InputError, match=r"height is exactly 9999 or -9999 at 1 grid points.*declare it with the attribute _FillValue"
    ):
        read_grid(path, Plane(), shapely.box(1e3, 1e3, 9e3, 9e3), "height")
