"""Figures and the self-contained page."""
