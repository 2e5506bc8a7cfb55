"""Observed and predicted tidal datums."""
