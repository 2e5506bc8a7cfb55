"""Tests; tests/outside compares with published sources."""
