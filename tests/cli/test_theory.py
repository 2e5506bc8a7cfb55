"""`tidekit theory` as its user sees it, against exact solutions.

The figures are those of the flat-bottom Kelvin wave (Thomson 1879; Gill 1982 section 10.4) and of a channel (Taylor
1921; Hendershott and Speranza 1971), computed from the cited formulae with g = 9.81, as in `tests/outside`.
"""

import json

import pytest
from numpy.testing import assert_allclose

from tidekit.cli import main as entry

PRINTED = 2e-5
"""Relative: the figures are given to five digits or more."""


@pytest.fixture(autouse=True)
def only_theory(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(entry, "COMMANDS", ("theory",))


def answer(capsys: pytest.CaptureFixture[str], *arguments: str) -> dict[str, float | str | None]:
    assert entry.main(["theory", *arguments, "--json"]) == 0
    document: dict[str, float | str | None] = json.loads(capsys.readouterr().out)
    return document


def shown(capsys: pytest.CaptureFixture[str], *arguments: str) -> dict[str, list[str]]:
    """Words of each line after its first, by its first."""
    assert entry.main(["theory", *arguments]) == 0
    return {line.split()[0]: line.split()[1:] for line in capsys.readouterr().out.splitlines()}


def test_kelvin_wave_of_the_deep_ocean(capsys: pytest.CaptureFixture[str]) -> None:
    found = answer(capsys, "kelvin", "--depth", "4000", "--latitude", "32", "--offshore", "2563.13")
    wanted = {"speed_m_per_s": 198.0909, "rossby_radius_km": 2563.13, "wavelength_km": 8857.47}
    assert_allclose([found[name] for name in wanted], list(wanted.values()), rtol=PRINTED)
    assert found["coast_on_the"] == "right"
    # A wavelength of 360 degrees; one trapping scale to sea the amplitude is 1/e.
    assert_allclose(found["lag_deg_per_100km"], 100.0 * 360.0 / 8857.47, rtol=PRINTED)
    assert_allclose(found["amplitude_ratio"], 0.3678794, rtol=PRINTED)


def test_constituent_and_hemisphere(capsys: pytest.CaptureFixture[str]) -> None:
    found = answer(capsys, "kelvin", "--depth", "200", "--latitude", "-45", "--constituent", "K1")
    assert_allclose(found["wavelength_km"], 3816.59, rtol=PRINTED)
    assert found["coast_on_the"] == "left"
    assert "amplitude_ratio" not in found


def test_free_waves_end_at_the_inertial_latitude(capsys: pytest.CaptureFixture[str]) -> None:
    # K1 is inertial at 30 degrees: free on one side of it, not on the other.
    equatorward = answer(capsys, "inertia-gravity", "--depth", "50", "--latitude", "29.9", "--constituent", "K1")
    poleward = answer(capsys, "inertia-gravity", "--depth", "50", "--latitude", "30.1", "--constituent", "K1")
    assert (equatorward["free"], poleward["free"]) == ("yes", "no")
    assert equatorward["wavelength_km"] is not None
    assert poleward["wavelength_km"] is None  # infinite, which JSON cannot say


def test_channel(capsys: pytest.CaptureFixture[str]) -> None:
    found = answer(capsys, "channel", "--depth", "50", "--latitude", "45", "--width", "200", "--reflection", "0.8")
    assert_allclose(found["critical_width_km"], 728.95, rtol=PRINTED)
    assert_allclose(found["amphidrome_spacing_km"], 990.30 / 2, rtol=PRINTED)
    assert_allclose(found["amphidrome_offset_km"], 0.111572 * 214.76, rtol=4 * PRINTED)
    assert found["amphidrome_in_channel"] == "yes"
    narrow = answer(capsys, "channel", "--depth", "50", "--latitude", "45", "--width", "40", "--reflection", "0.8")
    assert narrow["amphidrome_in_channel"] == "no, virtual"


def test_lines_give_name_number_and_meaning(capsys: pytest.CaptureFixture[str]) -> None:
    lines = shown(capsys, "kelvin", "--depth", "4000", "--latitude", "32")
    assert lines["speed_m_per_s"] == ["198.091", "speed", "along", "the", "coast,", "sqrt(g", "h)"]
    assert lines["coast_on_the"][0] == "right"
    equal = shown(capsys, "channel", "--depth", "50", "--latitude", "45", "--width", "200")
    assert equal["amphidrome_offset_km"][0] == "0"  # in mid-channel, without a sign


@pytest.mark.parametrize("kind", ["kelvin", "inertia-gravity", "channel"])
def test_help_holds_an_example_that_runs(kind: str, capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit, match="0"):
        entry.main(["theory", kind, "--help"])
    words = " ".join(capsys.readouterr().out.split())
    _, found, example = words.partition("example: tidekit ")
    assert found
    assert entry.main(example.split()) == 0


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        ("kelvin --depth -4 --latitude 45", "depth is -4 m; wanted a positive number of metres"),
        ("kelvin --depth nan --latitude 45", "wanted a positive number of metres"),
        ("kelvin --depth 4 --latitude 0", "on the equator no coast traps a Kelvin wave"),
        ("kelvin --depth 4 --latitude 95", "wanted -90 to 90"),
        ("kelvin --depth 4 --latitude 45 --constituent QQ9", "unknown constituent 'QQ9'"),
        ("kelvin --depth 4 --latitude 45 --offshore -1", "wanted 0 or more"),
        ("channel --depth 4 --latitude 45 --width 0", "wanted a positive number of kilometres"),
        ("channel --depth 4 --latitude 45 --width 9 --reflection 1.5", "wanted above 0 and at most 1"),
    ],
)
def test_wrong_requests_are_one_line(arguments: str, said: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert entry.main(["theory", *arguments.split()]) == 2
    heard = capsys.readouterr()
    assert heard.out == ""
    assert heard.err.count("\n") == 1
    assert said in heard.err


@pytest.mark.parametrize("arguments", ["", "kelvin --depth 4", "kelvin --depth deep --latitude 45", "ripple"])
def test_wrong_usage_is_one_line(arguments: str, capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit, match="2"):
        entry.main(["theory", *arguments.split()])
    heard = capsys.readouterr()
    assert heard.out == ""
    assert heard.err.count("\n") == 1
