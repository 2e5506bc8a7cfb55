"""Harmonic tide-gauge analysis and coastal-wave identification over gauge networks.

Not for navigation: heights and times computed here defer to the national hydrographic authority.
"""

__version__ = "0.1.0"
