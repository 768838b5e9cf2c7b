"""The wanted spacing and the centres spread after it.

Sources: the limited field against its definition, the brute-force minimum over all pixels; the density rule h ~ rho^(-1/4)
of centroidal tessellations (Gersho 1979); Hilbert's curve by its own property; plane trigonometry.
"""

import numpy as np
import pytest
import shapely

from swe.errors import InputError
from swe.mesh.delaunay import plane_triangles
from swe.mesh.layout import coarse_levels
from swe.mesh.relax import ROW, relaxed, row_offset
from swe.mesh.repair import LIMIT, bad_triangles, corner_angles, repaired
from swe.mesh.seeds import expected, halved, scattered
from swe.mesh.shoreline import true_shoreline
from swe.mesh.spacing import (
    ByDepth,
    Constant,
    NearCoast,
    Raster,
    Site,
    Smallest,
    SpacingField,
    Within,
    limited,
    raster_over,
    spacing_field,
)

PLACES = np.array([[0.0, 0.0], [3000, 0], [50e3, 0]])


def site(depth=None):
    """Places at growing distance from a coast at x = 0, with the depths given."""
    return Site(PLACES, lambda: PLACES[:, 0], lambda: np.array(depth), lambda area: shapely.contains_xy(area, PLACES))


def field(function, size=10e3, pixel=50.0):
    raster = raster_over((0, 0, size, size), 0.0, 2 * pixel)
    return SpacingField(raster, function(*raster.places().T).reshape(raster.shape))


def test_rules_say_what_they_promise():
    assert Constant(200.0).wanted(site()).tolist() == [200, 200, 200]
    assert NearCoast(100.0, 900.0, 0.1).wanted(site()).tolist() == [100, 400, 900]
    # 30 s sqrt(g D): D = 1 m is below the finest, 2500 m above the coarsest; in between the travel time is 30 s.
    by_depth = ByDepth(30.0, 200.0, 2000.0, 9.81).wanted(site([1.0, 90.0, 2500.0]))
    assert by_depth[[0, 2]].tolist() == [200, 2000] and by_depth[1] / np.sqrt(9.81 * 90) == pytest.approx(30)
    within = Within(shapely.box(2000, -1, 4000, 1), 50.0)
    assert within.wanted(site()).tolist() == [np.inf, 50, np.inf]
    both = Smallest((Constant(300.0), within))
    assert both.wanted(site()).tolist() == [300, 50, 300] and both.finest == 50


@pytest.mark.parametrize(
    "make, said",
    [
        (lambda: Constant(0.0), "spacing: 0.0 m"),
        (lambda: Constant(np.nan), "spacing: nan m"),
        (lambda: NearCoast(500.0, 100.0, 0.1), "finest 500 m exceeds coarsest 100 m"),
        (lambda: NearCoast(100.0, 500.0, 0.0), "growth of the spacing"),
        (lambda: NearCoast(100.0, 500.0, 0.9), "allowed are numbers above 0 up to 0.5"),
        (lambda: ByDepth(-1.0, 1.0, 2.0, 9.8), "crossing time"),
        (lambda: ByDepth(1.0, 1.0, 2.0, 0.0), "gravity"),
        (lambda: Within(shapely.box(0, 0, 1, 1), -5.0), "inside an area"),
        (lambda: spacing_field(Raster(0, 0, 1.0, (5, 5)), np.full(25, np.inf), 0.1), "no rule has a wish"),
        (lambda: spacing_field(Raster(0, 0, 1.0, (5, 5)), np.ones(25), -0.1), "growth of the spacing"),
    ],
)
def test_rules_that_make_no_sense(make, said):
    with pytest.raises(InputError, match=said):
        make()


def test_limited_field_is_the_smallest_cone_sum_up_to_the_directions():
    """Never below min(v(y) + growth |x - y|), and above it by no more than 2.8 % of the rise."""
    values = np.random.default_rng(1).uniform(100, 900, (37, 52))
    values[5, 7], values[30, 40] = 10.0, np.inf
    pixel, growth = 20.0, 0.3
    row, column = np.indices(values.shape).reshape(2, -1) * pixel
    way = np.hypot(row[:, None] - row, column[:, None] - column)
    exact = (values.ravel() + growth * way).min(axis=1)
    loose = (values.ravel() + 1.028 * growth * way).min(axis=1)
    found = limited(values, pixel, growth).ravel()
    assert (found >= exact - 1e-9).all() and (found <= loose + 1e-9).all()
    assert np.abs(np.diff(found.reshape(values.shape), axis=0)).max() <= growth * pixel * (1 + 1e-9)


def test_field_is_bilinear_and_knows_its_steepness():
    f = field(lambda x, y: 100 + 0.05 * x - 0.02 * y)
    places = np.random.default_rng(2).uniform(0, 10e3, (100, 2))
    assert f.at(places) == pytest.approx(100 + 0.05 * places[:, 0] - 0.02 * places[:, 1])
    assert f.steepness() == pytest.approx(0.05)
    assert f.at(np.array([[-1e6, -1e6]])) == pytest.approx(f.values[0, 0])


def test_large_areas_get_larger_pixels():
    raster = raster_over((0, 0, 1e6, 1e6), 0.0, 100.0, most=10_000)
    assert raster.pixel == pytest.approx(1e4) and np.prod(raster.shape) < 11_000


def test_scattered_centres_have_the_wanted_number_everywhere():
    """In each quarter of a graded field the count is the integral 2 / (sqrt(3) h^2), within a few."""
    f = field(lambda x, y: 60 + 0.01 * x)
    wanted = np.ones(f.values.shape, dtype=bool)
    centres = scattered(f, wanted, 2.0, 5)
    assert abs(len(centres) - expected(f, wanted) / 4) < 2
    for west in (0, 5000):
        for south in (0, 5000):
            inside = ((centres >= [west, south]) & (centres < [west + 5000, south + 5000])).all(axis=1).sum()
            integral = 5000 / (np.sqrt(3) / 2) * (1 / (60 + 0.01 * west) - 1 / (110 + 0.01 * west)) / 0.01 / 4
            assert inside == pytest.approx(integral, abs=0.05 * integral)
    assert np.array_equal(centres, scattered(f, wanted, 2.0, 5))
    assert not np.array_equal(centres, scattered(f, wanted, 2.0, 6))


def test_halving_a_lattice_gives_the_finer_lattice():
    column, row = np.meshgrid(np.arange(12.0), np.arange(10.0))
    lattice = np.column_stack([(column + (row % 2) / 2).ravel(), (row * np.sqrt(3) / 2).ravel()])
    finer = halved(lattice, np.ones(len(lattice)), 1)
    inner = finer[((finer > 2) & (finer < [9, 6])).all(axis=1)]
    near = np.sort(np.hypot(*(inner[:, None] - finer).transpose(2, 0, 1)), axis=1)[:, 1:7]
    assert near == pytest.approx(0.5, abs=2e-3)


def test_rows_of_a_coarser_pattern_are_rows_of_the_finer_one():
    for level in range(6):
        coarse, fine = row_offset(level + 1), row_offset(level)
        assert 0.25 <= coarse <= 0.75
        rows = {round(k + fine, 9) for k in range(-20, 20)}
        assert all(round(2 * (k + coarse), 9) in rows for k in range(-5, 5))


def test_sweeps_reach_the_graded_spacing():
    """Median distance of neighbours over wanted spacing in four classes of spacing, 1 to 3 times the finest."""
    f = field(lambda x, y: 120 + 0.03 * x)
    centres = scattered(f, np.ones(f.values.shape, dtype=bool), 1.0, 3)
    inside = ((centres > 600) & (centres < 9400)).all(axis=1)
    swept = relaxed(centres, inside, f.at, 60, None, 0.5)
    assert np.array_equal(swept[~inside], centres[~inside])
    corners = plane_triangles(swept).points
    corners = corners[inside[corners].all(axis=1)]
    first, second = swept[corners[:, 0]], swept[corners[:, 1]]
    ratio = np.hypot(*(first - second).T) / f.at((first + second) / 2)
    classes = np.digitize(f.at(first), [180, 240, 300, 360])
    for k in range(5):
        assert np.median(ratio[classes == k]) == pytest.approx(1, abs=0.05)


def test_a_straight_coast_gets_rows():
    """The first rows on both sides stand half a row from the coast; a plain sweep leaves them anywhere."""
    f = field(lambda x, y: np.full_like(x, 400.0))
    centres = scattered(f, np.ones(f.values.shape, dtype=bool), 1.0, 3)
    inside = ((centres > 1000) & (centres < 9000)).all(axis=1)
    coast = true_shoreline(shapely.box(0, 5000, 10e3, 10e3), 100.0)
    spread = []
    for shoreline in (coast, None):
        swept = relaxed(centres, inside, f.at, 80, shoreline, 0.5)
        distance = np.abs(swept[((swept > 2000) & (swept < 8000)).all(axis=1), 1] - 5000)
        first = distance[distance < ROW * 400.0]
        spread.append(np.sqrt(np.mean((first - ROW * 400.0 / 2) ** 2)) / 400.0)
    assert spread[0] < 0.08 < 2 * spread[0] < spread[1]


def test_angles_of_triangles():
    """3-4-5 and equilateral triangles."""
    angles = corner_angles(np.array([[[0.0, 0], [4, 0], [0, 3]], [[0, 0], [1, 0], [0.5, np.sqrt(3) / 2]]]))
    assert angles[0] == pytest.approx([90, np.degrees(np.arctan2(3, 4)), np.degrees(np.arctan2(4, 3))])
    assert angles[1] == pytest.approx(60)


def test_repair_cures_blunt_triangles_and_leaves_dry_ones():
    """Random centres swept a little: blunt angles at wet centres vanish, centres that are not free stay."""
    f = field(lambda x, y: np.full_like(x, 300.0))
    centres = scattered(f, np.ones(f.values.shape, dtype=bool), 1.0, 4)
    free = ((centres > 500) & (centres < 9500)).all(axis=1)
    centres = relaxed(centres, free, f.at, 8, None, 0.5)

    def wet(places):
        return ((places > 2000) & (places < 8000)).all(axis=1)

    assert len(bad_triangles(centres, wet)[0]) > 10
    cured, report = repaired(centres, free, f.at, wet)
    bad, largest = bad_triangles(cured, wet)
    assert len(bad) == 0 and largest <= LIMIT and report.largest_angle == largest
    assert report.bad_first > 10 and report.bad_last == 0
    assert len(cured) == len(centres) + report.added - report.removed
    assert {tuple(p) for p in centres[~free]} <= {tuple(p) for p in cured}


def test_repair_adds_and_takes_out_centres_where_pushing_does_not_help():
    """Centres thrown at random, with no sweep at all: holes and knots beyond small shifts."""
    places = np.random.default_rng(11).uniform(0, 30, (1000, 2))
    free = ((places > 2) & (places < 28)).all(axis=1)
    cured, report = repaired(places, free, lambda p: np.ones(len(p)), lambda p: ((p > 4) & (p < 26)).all(axis=1))
    assert report.bad_first > 500 and report.bad_last < 20
    assert report.largest_angle < 86.0 and report.added > 0 and report.removed > 0
    assert len(cured) == len(places) + report.added - report.removed


@pytest.mark.parametrize(
    "number, steepness, levels", [(200, 0.0, 0), (1100, 0.0, 1), (100_000, 0.0, 4), (100_000, 0.15, 2), (100_000, 0.4, 0)]
)
def test_levels_for_a_number_of_faces_and_a_steepness(number, steepness, levels):
    assert coarse_levels(number, steepness) == levels
