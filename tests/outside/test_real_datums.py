"""Datums against published ones.

NOAA CO-OPS: accepted datums (epoch 1983-2001) and harmonic constants of its stations; six-minute heights of 9414290;
verified high and low waters of 8418150. The files are not part of the project.
"""

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from numpy.testing import assert_allclose

from tidekit.astronomy.timescales import hours_from_datetime64
from tidekit.constituents.constants_table import read_constants
from tidekit.datums.observed import datums_of_series
from tidekit.datums.predicted import predicted_datums
from tidekit.harmonic.analysis import analyse_record
from tidekit.prediction.tidal_day import tidal_day_kinds
from tidekit.prediction.turning_points import TurningPoints
from tidekit.records.reading import read_record

REAL = Path(__file__).parents[2].parent / "shared" / "real"
pytestmark = pytest.mark.skipif(not REAL.is_dir(), reason="the real records are not beside the repository")

WATERS = {"MHHW": ("HH",), "MHW": ("HH", "H"), "MLW": ("L", "LL"), "MLLW": ("LL",)}
FOOT_M = 0.3048

STATIONS = {
    # From small and mixed to large and semidiurnal; Neah Bay is 9443090.
    "1611400": 0.01,
    "8410140": 0.01,
    "8418150": 0.01,
    "8729840": 0.03,
    "9410840": 0.01,
    "9443090": 0.01,
    "9447130": 0.02,
    "9459450": 0.01,
}
"""Stations and the misfit allowed in each of MHHW, MHW, MLW and MLLW [m].

Over all 87 stations that have both tables the median misfit is under 0.5 cm in each level; the middle half lies within
0.9 cm in MHHW, MHW and MLW, and from -0.4 to +2.0 cm in MLLW (computed with this code). Constants carry no weather,
which draws the lower of two nearly equal low waters down; that shows where the diurnal inequality is small. The
diurnal tide of Pensacola (8729840) comes out 4 cm too wide; why is not known.
"""


@pytest.fixture(scope="module")
def published() -> pd.DataFrame:
    """Published datums by station, relative to mean sea level. [m]"""
    path = REAL / "published_constants" / "noaa_datums.csv"
    return pd.read_csv(path, dtype={"station_id": str}).set_index("station_id")


@pytest.mark.parametrize("station", STATIONS)
def test_predicted_over_the_published_epoch(published: pd.DataFrame, station: str) -> None:
    constants = read_constants(REAL / "published_constants" / "noaa_constants.csv", gauge=station)
    table = predicted_datums(constants, gauge=station, years=(1983, 2001))
    expected = [published.loc[station, f"{name.lower()}_minus_msl_m"] for name in WATERS]
    assert_allclose([table.height(name) for name in WATERS], expected, atol=STATIONS[station], rtol=0)


GOLDEN_GATE_M = 0.012
"""Predicted misfits are +0.1 to -1.1 cm (MHHW)."""
GOLDEN_GATE_OBSERVED_M = 0.02
"""Four observed years, brought to the epoch by the predicted difference: within 1.5 of the table's own errors."""


def test_golden_gate_predicted_and_observed(published: pd.DataFrame) -> None:
    folder = REAL / "golden_gate"
    constants = read_constants(folder / "published_constants.csv")
    epoch, record = (predicted_datums(constants, years=years) for years in ((1983, 2001), (2015, 2018)))
    frame = pd.concat([pd.read_csv(file, comment="#") for file in sorted(folder.glob("*_elev_*.csv.gz"))])
    frame = frame.dropna(subset=["value"])
    t_h = hours_from_datetime64(pd.to_datetime(frame["datetime"]).to_numpy()) + 8.0
    observed = datums_of_series(t_h, frame["value"].to_numpy(dtype=np.float64), 0.1)
    assert observed.details["tidal_days"] > 1400
    expected = np.array([published.loc["9414290", f"{name.lower()}_minus_msl_m"] for name in WATERS])
    assert_allclose([epoch.height(n) for n in WATERS], expected, atol=GOLDEN_GATE_M, rtol=0)
    above_mean = np.array([observed.height(n) - observed.height("MSL") for n in WATERS])
    nodal_state = np.array([epoch.height(n) - record.height(n) for n in WATERS])
    assert_allclose(above_mean + nodal_state, expected, atol=GOLDEN_GATE_OBSERVED_M, rtol=0)
    spread = np.array([observed.height_sd(n) for n in WATERS])
    assert np.all(np.abs(above_mean + nodal_state - expected) < 2 * spread)


AGREEING_RANKS = 0.92
"""Part of 4232 waters that the agency ranks alike; it pairs some days the other way about, which of two nearly equal
waters then leads is chance."""
RANKED_MEANS_M = 0.01
"""How far that moves MHHW and MLLW."""
GREAT_RANGE_FT, GREAT_RANGE_M = 9.91, 0.025
"""Published MHHW above MLLW, and how near three years come once brought to the epoch (+1.6 cm was found)."""


def test_ranks_of_the_published_waters() -> None:
    """Portland, local time with daylight saving, feet above MLLW."""
    frame = pd.read_csv(REAL / "high_low_waters" / "portland_8418150_2015_2017.csv")
    local = pd.to_datetime(frame["local_time"]).dt.tz_localize("America/New_York")
    waters = TurningPoints(
        t_h=hours_from_datetime64(local.dt.tz_convert("UTC").dt.tz_localize(None).to_numpy()),
        height_m=frame["height_ft_mllw"].to_numpy(dtype=np.float64) * FOOT_M,
        is_high=frame["type"].str.startswith("H").to_numpy(dtype=bool),
    )
    kinds, theirs = tidal_day_kinds(waters), frame["type"].to_numpy(dtype=str)
    assert np.mean(kinds == theirs) > AGREEING_RANKS
    ours = {name: waters.height_m[np.isin(kinds, ranks)].mean() for name, ranks in WATERS.items()}
    agency = {name: waters.height_m[np.isin(theirs, ranks)].mean() for name, ranks in WATERS.items()}
    assert_allclose(list(ours.values()), list(agency.values()), atol=RANKED_MEANS_M, rtol=0)
    constants = read_constants(REAL / "published_constants" / "noaa_constants.csv", gauge="8418150")
    epoch, years = (predicted_datums(constants, years=y) for y in ((1983, 2001), (2015, 2017)))
    great_range = ours["MHHW"] - ours["MLLW"] + epoch.height("GT") - years.height("GT")
    assert_allclose(great_range, GREAT_RANGE_FT * FOOT_M, atol=GREAT_RANGE_M)


NEAH_BAY_M = 0.01
"""Half a centimetre was found in each level: constants of one year stand for nineteen, since the nodal modulation is
exact."""


def test_neah_bay_from_the_raw_export_of_one_year(published: pd.DataFrame) -> None:
    """Export of 2006 to record, to constants, to datums of 1983-2001 above mean sea level."""
    record = read_record(REAL / "pacific_coast" / "NeahBay_31-Dec-2005_02-Jan-2007.csv")
    table = predicted_datums(analyse_record(record).constants, years=(1983, 2001))
    expected = [published.loc["9443090", f"{name.lower()}_minus_msl_m"] for name in WATERS]
    above_mean = [table.height(name) - table.height("MSL") for name in WATERS]
    assert_allclose(above_mean, expected, atol=NEAH_BAY_M, rtol=0)
