"""The rooms and the commands: what every one of them must have."""

from pathlib import Path

import pytest

from tidekit.cli.main import COMMANDS, build_parser, main

ROOT = Path(__file__).parents[1]


def test_a_room_imports_only_rooms_above_it(monkeypatch: pytest.MonkeyPatch) -> None:
    linter = pytest.importorskip("importlinter.cli", reason="import-linter comes with the extra `dev`")
    monkeypatch.chdir(ROOT)
    assert linter.lint_imports() == 0


@pytest.mark.parametrize("command", COMMANDS)
def test_every_command_has_help_with_an_example(command: str, capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit, match="0"):
        build_parser().parse_args([command, "--help"])
    text = capsys.readouterr().out
    assert f"example: tidekit {command}" in " ".join(text.split())
    assert "--json" in text or command == "theory"


def test_an_unknown_option_is_one_line(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit, match="2"):
        main(["audit", "x.toml", "--out", "o", "--quick"])
    assert capsys.readouterr().err.count("\n") == 1


def test_the_version_is_one_number() -> None:
    text = (ROOT / "pyproject.toml").read_text()
    from tidekit import __version__  # noqa: PLC0415

    assert f'version = "{__version__}"' in text


def test_the_readme_says_every_command_and_setting() -> None:
    from dataclasses import fields  # noqa: PLC0415

    from tidekit.records.network import AuditSettings  # noqa: PLC0415

    readme = (ROOT / "README.md").read_text()
    assert [command for command in COMMANDS if f"tidekit {command}" not in readme] == []
    assert [field.name for field in fields(AuditSettings) if f"`{field.name}`" not in readme] == []
