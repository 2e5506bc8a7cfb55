"""Where a gauge stands."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True)
class Station:
    """One gauge's place and vertical reference."""

    id: str
    """Short identifier, unique in its network."""
    name: str = ""
    """Name for people; the id where it is empty."""
    latitude_deg: float | None = None
    """Latitude, north positive. [degrees]"""
    longitude_deg: float | None = None
    """Longitude, east positive, -180 to 360. [degrees]"""
    vertical_reference: str | None = None
    """What the heights are measured from, in the words of the source."""
    along_coast_km: float | None = None
    """Position along the coast. [km]"""
    offshore_km: float | None = None
    """Distance seaward of the coast; None is unknown and taken as 0. [km]"""
    open_coast: bool = True
    """Whether the gauge feels the open coast's wave; False keeps it out of the wave fit."""

    @property
    def label(self) -> str:
        """The name for people."""
        return self.name or self.id
