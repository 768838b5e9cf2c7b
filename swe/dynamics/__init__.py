"""Dynamics of one layer of water: rates, diagnostics, and the linear operators about rest and about the current state."""
