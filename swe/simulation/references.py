"""The published methods that a case uses. One entry per method: when it is used, what for, and the citation."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass


@dataclass(frozen=True)
class Reference:
    """`used(case)` says whether a case needs the method; `topic` what it is used for; `text` the citation."""

    topic: str
    text: str
    used: Callable[[object], bool]


def _always(case) -> bool:
    return True


def _exponential(case) -> bool:
    return case.method.stepper != "runge-kutta-4"


def _generates(case) -> bool:
    return case.mesh.file is None


REFERENCES = (
    Reference(
        "mesh", "Du, Q., Faber, V. & Gunzburger, M. 1999: Centroidal Voronoi tessellations. SIAM Rev. 41, 637-676.", _generates
    ),
    Reference(
        "areas on the sphere",
        "Van Oosterom, A. & Strackee, J. 1983: The solid angle of a plane triangle. IEEE Trans. Biomed. Eng. 30, 125-126.",
        lambda case: case.basin.surface == "sphere",
    ),
    Reference(
        "operators on the staggered mesh",
        "Thuburn, J., Ringler, T., Skamarock, W. & Klemp, J. 2009: Numerical representation of geostrophic modes on arbitrarily "
        "structured C-grids. J. Comput. Phys. 228, 8321-8335.",
        _always,
    ),
    Reference(
        "energy-conserving equations",
        "Ringler, T., Thuburn, J., Klemp, J. & Skamarock, W. 2010: A unified approach to energy conservation and potential vorticity "
        "dynamics for arbitrarily-structured C-grids. J. Comput. Phys. 229, 3065-3090.",
        _always,
    ),
    Reference(
        "currents at face centres",
        "Perot, B. 2000: Conservation properties of unstructured staggered mesh schemes. J. Comput. Phys. 159, 58-89.",
        _always,
    ),
    Reference(
        "two-stage exponential step",
        "Cox, S. M. & Matthews, P. C. 2002: Exponential time differencing for stiff systems. J. Comput. Phys. 176, 430-455.",
        lambda case: case.method.stepper == "two-stage",
    ),
    Reference(
        "exponential Rosenbrock-Euler step",
        "Hochbruck, M. & Ostermann, A. 2010: Exponential integrators. Acta Numerica 19, 209-286.",
        lambda case: case.method.stepper == "one-stage",
    ),
    Reference(
        "classical Runge-Kutta step",
        "Kutta, W. 1901: Beitrag zur naeherungsweisen Integration totaler Differentialgleichungen. Z. Math. Phys. 46, 435-453.",
        lambda case: case.method.stepper == "runge-kutta-4",
    ),
    Reference(
        "Lanczos action",
        "Hochbruck, M. & Lubich, C. 1997: On Krylov subspace approximations to the matrix exponential operator. SIAM J. Numer. Anal. 34, 1911-1925.",
        lambda case: _exponential(case) and case.method.action == "lanczos",
    ),
    Reference(
        "Chebyshev action",
        "Tal-Ezer, H. & Kosloff, R. 1984: An accurate and efficient scheme for propagating the time dependent Schroedinger equation. J. Chem. Phys. 81, 3967-3971.",
        lambda case: _exponential(case) and case.method.action == "chebyshev",
    ),
    Reference(
        "Arnoldi action",
        "Saad, Y. 1992: Analysis of some Krylov subspace approximations to the matrix exponential operator. SIAM J. Numer. Anal. 29, 209-228.",
        lambda case: _exponential(case) and case.method.action == "arnoldi",
    ),
    Reference(
        "decay of entries, overlap from the Bessel tail",
        "Iserles, A. 2000: How large is the exponential of a banded matrix? New Zealand J. Math. 29, 177-192; "
        "Benzi, M. & Razouk, N. 2007: Decay bounds and O(n) algorithms for approximating functions of sparse matrices. ETNA 28, 16-39.",
        _exponential,
    ),
    Reference(
        "drag of the wind",
        "Large, W. G. & Pond, S. 1981: Open ocean momentum flux measurements in moderate to strong winds. J. Phys. Oceanogr. 11, 324-336.",
        lambda case: case.wind.law == "large-pond-1981",
    ),
    Reference(
        "drag of the wind",
        "Garratt, J. R. 1977: Review of drag coefficients over oceans and continents. Mon. Wea. Rev. 105, 915-929.",
        lambda case: case.wind.law == "garratt-1977",
    ),
    Reference(
        "drag of the wind",
        "Wu, J. 1982: Wind-stress coefficients over sea surface from breeze to hurricane. J. Geophys. Res. 87, 9704-9706.",
        lambda case: case.wind.law == "wu-1982",
    ),
    Reference(
        "drag of the wind",
        "Smith, S. D. 1980: Wind stress and heat flux over the ocean in gale force winds. J. Phys. Oceanogr. 10, 709-726.",
        lambda case: case.wind.law == "smith-1980",
    ),
    Reference(
        "drag of the wind",
        "Smith, S. D. 1988: Coefficients for sea surface wind stress, heat flux, and wind profiles. J. Geophys. Res. 93, 15467-15472.",
        lambda case: case.wind.law == "smith-1988",
    ),
    Reference(
        "moving storm",
        "Holland, G. J. 1980: An analytic model of the wind and pressure profiles in hurricanes. Mon. Wea. Rev. 108, 1212-1218.",
        lambda case: case.storm.track is not None,
    ),
    Reference(
        "friction of the bed",
        "Manning, R. 1891: On the flow of water in open channels and pipes. Trans. Inst. Civ. Eng. Ireland 20, 161-207.",
        lambda case: case.drag.manning is not None,
    ),
    Reference(
        "radiating open boundaries",
        "Flather, R. A. 1976: A tidal model of the north-west European continental shelf. Mem. Soc. R. Sci. Liege 6(10), 141-164.",
        lambda case: bool(case.openings),
    ),
    Reference(
        "equilibrium tide",
        "Hartmann, T. & Wenzel, H.-G. 1995: The HW95 tidal potential catalogue. Geophys. Res. Lett. 22, 3553-3556.",
        lambda case: bool(case.tide.equilibrium),
    ),
    Reference(
        "overlapping subdomains", "Gander, M. J. 2008: Schwarz methods over the course of time. ETNA 31, 228-255.", _always
    ),
    Reference(
        "partition into subdomains",
        "Karypis, G. & Kumar, V. 1998: A fast and high quality multilevel scheme for partitioning irregular graphs. SIAM J. Sci. Comput. 20, 359-392.",
        _always,
    ),
    Reference(
        "files",
        "Eaton, B. et al.: NetCDF Climate and Forecast (CF) Metadata Conventions, version 1.11; UGRID Conventions 1.0.",
        _always,
    ),
)
"""Citations are from memory unless shared checks confirm them; the volumes and pages should be looked up before they are quoted."""


def cite(case) -> list[str]:
    """Return the lines "topic: citation" of the methods that `case` uses. Not collective."""
    return [f"{entry.topic}: {entry.text}" for entry in REFERENCES if entry.used(case)]
