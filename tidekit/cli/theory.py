"""`tidekit theory`: the wave calculator."""

from __future__ import annotations

import argparse
from typing import Any

from tidekit.cli.output import print_json
from tidekit.constituents.catalogue import resolve
from tidekit.waves.channel import amphidrome_offset_km, amphidrome_spacing_km
from tidekit.waves.inertia_gravity import critical_width_km, evanescent_scale_km, wavelength_km
from tidekit.waves.kelvin import KelvinWave
from tidekit.waves.rotation import angular_speed_rad_per_s


def add_parser(commands: Any) -> None:
    """Add the command to the parser."""
    parser = commands.add_parser(
        "theory",
        help="the wave calculator: speeds, trapping scales, channels",
        description="What theory says of long waves beside a coast: a Kelvin wave, free inertia-gravity waves, and two "
        "Kelvin waves in a channel. The bottom is flat.",
        epilog="example: tidekit theory kelvin --depth 60 --latitude -41.2 --constituent M2",
    )
    kinds = parser.add_subparsers(dest="kind", required=True, metavar="WAVE")
    for name, text, example, run in (
        ("kelvin", "a wave held to a straight coast", "--depth 60 --latitude -41.2 --offshore 118", kelvin),
        (
            "inertia-gravity",
            "free waves that rotation only bends",
            "--depth 4000 --latitude 20 --constituent K1",
            inertia_gravity,
        ),
        (
            "channel",
            "two opposed Kelvin waves: amphidromes, and the width that keeps other waves out",
            "--depth 50 --latitude 45 --width 200 --reflection 0.8",
            channel,
        ),
    ):
        kind = kinds.add_parser(
            name,
            help=text,
            description=text[0].upper() + text[1:] + ".",
            epilog=f"example: tidekit theory {name} {example}",
        )
        kind.add_argument("--depth", type=float, required=True, metavar="M", help="depth [m]")
        kind.add_argument("--latitude", type=float, required=True, metavar="DEG", help="latitude, north positive [deg]")
        kind.add_argument("--constituent", default="M2", metavar="NAME", help="constituent (default M2)")
        kind.add_argument("--json", action="store_true", help="print one JSON document and nothing else")
        kind.set_defaults(run=run)
        if name == "kelvin":
            kind.add_argument(
                "--offshore", type=float, metavar="KM", help="amplitude at this distance offshore too [km]"
            )
        if name == "channel":
            kind.add_argument("--width", type=float, required=True, metavar="KM", help="width of the channel [km]")
            kind.add_argument(
                "--reflection",
                type=float,
                default=1.0,
                metavar="A",
                help="reflected over incident amplitude (default 1)",
            )


def kelvin(options: argparse.Namespace) -> int:
    """Show a Kelvin wave."""
    wave, speed = _wave(options)
    found: dict[str, tuple[float | str, str]] = {
        "speed_m_per_s": (wave.speed_m_per_s, "speed along the coast, sqrt(g h)"),
        "coriolis_rad_per_s": (wave.coriolis_rad_per_s, "Coriolis parameter f"),
        "rossby_radius_km": (wave.rossby_radius_km, "distance offshore to 1/e, c/|f|"),
        "coast_on_the": (wave.coast_side, "side of the coast, looking the way the wave travels"),
        "wavelength_km": (wave.wavelength_km(speed), f"wavelength of {options.constituent}"),
        "lag_deg_per_100km": (
            float(wave.lag_deg(100.0, speed)),
            f"growth of {options.constituent}'s phase lag in 100 km",
        ),
        "current_m_per_s_per_m": (float(wave.current_m_per_s(1.0)), "alongshore current under 1 m of height"),
    }
    if options.offshore is not None:
        ratio = float(wave.amplitude_ratio(options.offshore))
        found["amplitude_ratio"] = (ratio, f"amplitude at {options.offshore:g} km over that at the coast")
    return _show(found, options)


def inertia_gravity(options: argparse.Namespace) -> int:
    """Show free inertia-gravity waves."""
    wave, speed = _wave(options)
    frequency = angular_speed_rad_per_s(speed)
    free = frequency > abs(wave.coriolis_rad_per_s)
    return _show(
        {
            "frequency_rad_per_s": (frequency, f"frequency of {options.constituent}"),
            "coriolis_rad_per_s": (wave.coriolis_rad_per_s, "Coriolis parameter f"),
            "free": ("yes" if free else "no", "whether such a wave travels freely (frequency above |f|)"),
            "wavelength_km": (wavelength_km(wave, frequency), "its wavelength"),
        },
        options,
    )


def channel(options: argparse.Namespace) -> int:
    """Show two opposed Kelvin waves in a channel."""
    wave, speed = _wave(options)
    frequency = angular_speed_rad_per_s(speed)
    offset = amphidrome_offset_km(wave, options.reflection)
    inside = offset <= options.width / 2
    return _show(
        {
            "amphidrome_spacing_km": (amphidrome_spacing_km(wave, frequency), "distance between amphidromes"),
            "amphidrome_offset_km": (offset, "from mid-channel toward the reflected wave's coast"),
            "amphidrome_in_channel": ("yes" if inside else "no, virtual", "whether it lies in the water"),
            "critical_width_km": (critical_width_km(wave, frequency), "width above which other waves travel too"),
            "evanescent_scale_km": (
                evanescent_scale_km(wave, frequency, options.width),
                "distance over which the first other wave dies along this channel",
            ),
        },
        options,
    )


def _wave(options: argparse.Namespace) -> tuple[KelvinWave, float]:
    return KelvinWave(options.depth, options.latitude), resolve(options.constituent).speed_deg_per_h


def _show(found: dict[str, tuple[float | str, str]], options: argparse.Namespace) -> int:
    if options.json:
        print_json({name: value for name, (value, _) in found.items()})
        return 0
    for name, (value, meaning) in found.items():
        shown = value if isinstance(value, str) else f"{value:.6g}"
        print(f"{name:<24}{shown:>14}  {meaning}")
    return 0
