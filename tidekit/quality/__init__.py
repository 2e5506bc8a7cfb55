"""Screening tests, flags, findings, clock and step detectors."""
