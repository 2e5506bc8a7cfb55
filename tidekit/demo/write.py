"""Write the demonstration network: exports in two layouts, the network file, the truth, and a word on all of them."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from tidekit.demo.coast import DEPTH_M, GAUGES, MEAN_LATITUDE_DEG, TIDE, DemoGauge, wave
from tidekit.demo.series import STEP_AT, WEATHER_SPEED_M_PER_S, DemoSeries, gauge_truth, make_series
from tidekit.files import write_text

SEED = 20210719


def write_demo(folder: str | Path, *, seed: int = SEED) -> tuple[Path, ...]:
    """Write the invented network into a folder.

    Parameters
    ----------
    folder : path-like
        Made if absent; files of the same names are replaced.
    seed : int
        Seed of the noise and gaps.

    Returns
    -------
    tuple of Path
        The files written, `network.toml` first.

    Raises
    ------
    InputError
        If the folder cannot be written.
    """
    root = Path(folder)
    series = make_series(seed)
    texts = {
        root / "network.toml": _network_text(),
        root / "truth.toml": _truth_text(seed),
        root / "README.md": _readme_text(seed),
    }
    for gauge in GAUGES:
        writer = {"commas": _commas, "semicolons": _semicolons}[gauge.layout]
        texts[root / _export_name(gauge)] = writer(gauge, series[gauge.id])
    for path, text in texts.items():
        write_text(path, text)
    return tuple(texts)


def _export_name(gauge: DemoGauge) -> str:
    return f"exports/{gauge.id}_2021.{'csv' if gauge.layout == 'commas' else 'txt'}"


def _commas(gauge: DemoGauge, series: DemoSeries) -> str:
    lines = [
        f"# gauge: {gauge.name}",
        f"# vertical reference: {gauge.reference}",
        "# times: UTC",
        "time,water level (m),battery (V)",
    ]
    times = np.datetime_as_string(series.clock, unit="m")
    for time, height in zip(times, series.height_m, strict=True):
        value = "" if np.isnan(height) else f"{height:.3f}"
        lines.append(f"{time.replace('T', ' ')},{value},12.6")
    return "\n".join(lines) + "\n"


def _semicolons(gauge: DemoGauge, series: DemoSeries) -> str:
    lines = [
        f"Station;{gauge.name}",
        f"Datum;{gauge.reference}",
        "Clock;UTC+6",
        "Date;Clock time;Height [m];Samples",
    ]
    for clock, height in zip(series.clock + np.timedelta64(6, "h"), series.height_m, strict=True):
        day, time = str(clock.astype("datetime64[m]")).split("T")
        year, month, date = day.split("-")
        value = "-99,000" if np.isnan(height) else f"{height:.3f}".replace(".", ",")
        lines.append(f"{date}.{month}.{year};{time};{value};60")
    return "\r\n".join(lines) + "\r\n"


def _network_text() -> str:
    lines = [
        "# An invented coast in the southern hemisphere; made by `tidekit demo`. Its truth is in truth.toml.",
        "[network]",
        'name = "Avel coast (invented)"',
        "",
        "[coast]",
        'side = "left"          # the land lies left of one who looks along increasing along_coast_km',
        f"depth_m = {DEPTH_M}",
    ]
    for gauge in GAUGES:
        latitude, longitude = gauge.place_deg
        lines += [
            "",
            "[[gauge]]",
            f'id = "{gauge.id}"',
            f'name = "{gauge.name}"',
            f"latitude = {latitude}",
            f"longitude = {longitude}",
            f"along_coast_km = {gauge.along_km}",
            f"offshore_km = {gauge.offshore_km}",
            f'file = "{_export_name(gauge)}"',
            f'vertical_reference = "{gauge.reference}"',
        ]
    return "\n".join(lines) + "\n"


def _truth_text(seed: int) -> str:
    kelvin = wave()
    far = max(gauge.offshore_km for gauge in GAUGES)
    lines = [
        "# What the invented network was made with.",
        f"seed = {seed}",
        f"speed_m_per_s = {kelvin.speed_m_per_s:.4f}",
        f"mean_latitude_deg = {MEAN_LATITUDE_DEG}",
        f"cross_shore_ratio = {float(kelvin.amplitude_ratio(far)):.4f}",
        f"cross_shore_at_km = {far}",
    ]
    for gauge in GAUGES:
        for kind, value in gauge_truth(gauge):
            lines += ["", "[[fault]]", f'gauge = "{gauge.id}"', f'kind = "{kind}"', f"value = {value:.6g}"]
            if kind == "datum_step":
                lines.append(f'at_utc = "{STEP_AT}:00"')
    return "\n".join(lines) + "\n"


def _readme_text(seed: int) -> str:
    kelvin = wave()
    far = max(gauge.offshore_km for gauge in GAUGES)
    ratio = float(kelvin.amplitude_ratio(far))
    return f"""# Avel coast, invented

No such coast, harbour or gauge exists, and no height here was measured. Made by `tidekit demo` with seed {seed}; the
same seed gives the same files. Not for navigation.

The coast faces east in the southern hemisphere. Its tide is a Kelvin wave over {DEPTH_M:g} m of water: it runs
north with the land on its left at {kelvin.speed_m_per_s:.2f} m/s, and {far:g} km offshore {ratio:.3f} of the
coast's amplitude is left. To the tide of {len(TIDE)} constituents are added weather that passes along the coast as a
shelf wave of {WEATHER_SPEED_M_PER_S:g} m/s, red noise of each place, the instrument's own noise, a tide that wanders a
little, gaps of hours to days, and missing marks.

| file | what |
|---|---|
| `network.toml` | the coast and its {len(GAUGES)} gauges, for `tidekit audit` |
| `exports/*.csv` | hourly heights of 2021: commas, comment lines, metres, UTC |
| `exports/*.txt` | another layout: semicolons, decimal commas, day first, a clock at UTC+6, -99,000 where missing |
| `truth.toml` | what is wrong with four of the gauges, and the wave's true speed and decay |

Look into `truth.toml` last: the audit should find on its own a clock, a time zone, a unit and a datum step.
"""
