"""Real records against published constants: Neah Bay, two years, against NOAA's accepted constants.

NOAA CO-OPS station 9443090; hourly heights of 2006 and 2009 at UTC-8 (see the data's README). The accepted constants
come from other years, so real changes of the tide and of the weather are part of the difference.
"""

from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from tidekit.harmonic.analysis import analyse_record
from tidekit.records.reading import read_record

REAL = Path(__file__).parents[2].parent / "shared" / "real"
pytestmark = pytest.mark.skipif(not REAL.is_dir(), reason="the real records are not beside the repository")

STATION = 9443090
CENTIMETRE = 0.01
LAG_TOLERANCE_DEG = 1.5
NAMES = ("M2", "S2", "N2", "K1", "O1")


@pytest.mark.parametrize("year", [2006, 2009])
def test_neah_bay(year: int) -> None:
    """Worst found: 4.4 mm (M2 2009, N2 2006) and 0.84 degrees (N2 2009)."""
    published = pd.read_csv(REAL / "published_constants" / "noaa_constants.csv")
    published = published[published["station_id"] == STATION].set_index("constituent").loc[list(NAMES)]
    path = REAL / "pacific_coast" / f"NeahBay_31-Dec-{year - 1}_02-Jan-{year + 1}.csv"
    found = analyse_record(read_record(path)).constants.select(NAMES)
    assert np.max(np.abs(found.amplitude_m - published["amplitude_m"].to_numpy())) < CENTIMETRE
    difference = np.mod(found.phase_lag_deg - published["phase_lag_deg_utc"].to_numpy() + 180.0, 360.0) - 180.0
    assert np.max(np.abs(difference)) < LAG_TOLERANCE_DEG
