"""Rotating shallow water on a staggered mesh: levels and currents of one basin, with overlapping subdomains under MPI."""

__version__ = "0.1.0"
