"""The whole audit on ten real gauges, two years, from the raw exports of NOAA and the Canadian Hydrographic Service."""

import json
import time
from pathlib import Path

import pytest

from tidekit.cli.main import main

REAL = Path(__file__).parents[3] / "shared" / "real" / "pacific_coast"
pytestmark = pytest.mark.skipif(not REAL.is_dir(), reason="the real records at ../shared/real are not here")

AUDIT_S = 60.0
"""The README's promise for ten gauges and a year, here in processor time: on two free cores the clock shows less."""

# Latitude, longitude east, name of the export, faces the open ocean. Distances along the coast follow the line
# through the open-coast gauges.
GAUGES = {
    "toke_point": (46.7075, -123.9669, "TokePoint", True),
    "neah_bay": (48.3667, -124.6117, "NeahBay", True),
    "bamfield": (48.836, -125.136, "wlev_8545", True),
    "tofino": (49.154, -125.913, "wlev_8615", True),
    "winter_harbour": (50.513, -128.029, "wlev_8735", True),
    "port_hardy": (50.722, -127.489, "wlev_8408", False),
    "victoria": (48.4247, -123.3707, "wlev_7120", False),
    "patricia_bay": (48.6536, -123.4515, "wlev_7277", False),
    "point_atkinson": (49.337, -123.253, "wlev_7795", False),
    "campbell_river": (50.042, -125.247, "wlev_8074", False),
}


def network_text(year: int) -> str:
    line = [[place[0], place[1]] for place in GAUGES.values() if place[3]]
    text = f'[network]\nname = "Pacific coast {year}"\n[coast]\nside = "right"\ndepth_m = 3000.0\nline = {line}\n'
    for gauge, (latitude, longitude, export, is_open) in GAUGES.items():
        (path,) = REAL.glob(f"{export}_31-Dec-{year - 1}_*.csv")
        text += (
            f'[[gauge]]\nid = "{gauge}"\nlatitude = {latitude}\nlongitude = {longitude}\nfile = "{path}"\n'
            f"open_coast = {str(is_open).lower()}\noffshore_km = 0.0\n"
        )
    return text


@pytest.mark.parametrize("year", [2006, 2009])
def test_the_tide_goes_north_with_the_coast_on_its_right(year: int, tmp_path: Path) -> None:
    (tmp_path / "network.toml").write_text(network_text(year))
    started = time.process_time()
    assert main(["audit", str(tmp_path / "network.toml"), "--out", str(tmp_path / "out")]) in (0, 1)
    assert time.process_time() - started < AUDIT_S
    document = json.loads((tmp_path / "out" / "audit.json").read_text())
    together = document["propagation"][-1]
    assert 280.0 < together["direction_deg"] < 360.0
    assert "with the coast on its right" in document["verdict_evidence"]
    used = {gauge["gauge"] for gauge in document["gauges"] if gauge["in_wave_fit"]}
    assert used == {gauge for gauge, place in GAUGES.items() if place[3]}
    rows = [gauge["rows"] for gauge in document["gauges"]]
    assert all(r["kept"] + r["flagged"] + r["rejected"] == r["rows"] for r in rows)
    # Whole years; the records' notes name absent rows, the longest 121 h (8074 in 2006).
    assert all(gauge["coverage"] > 0.95 for gauge in document["gauges"])
    # Bays and straits delay the tide: no sound gauge may be accused of a wrong clock, zone or unit.
    errors = [f for f in document["findings"] if f["severity"] == "error"]
    assert [f for f in errors if f["kind"] in ("clock_offset", "time_zone", "unit_scale", "inverted", "gain")] == []
