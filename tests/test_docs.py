"""What the prose claims is so."""

from __future__ import annotations

import re
import shlex
from pathlib import Path

import click
import pytest
from click.testing import CliRunner

from collector.cli import main

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")


def test_the_page_in_the_readme_is_the_products():
    shown = re.search(r"<!-- page of (\S+) -->\n```text\n(.*?)```", README, re.DOTALL)
    assert shown
    result = CliRunner().invoke(main, ["year", str(ROOT / shown[1])])
    assert result.exit_code == 0
    assert result.stdout.startswith(shown[2])


def test_the_table_of_coatings_in_the_readme_is_the_products(monkeypatch):
    shown = re.search(r"<!-- table of coatings -->\n```text\n(.*?)```", README, re.DOTALL)
    command = re.search(r"^\.venv/bin/noonplate (coatings .*)$", README, re.MULTILINE)
    assert shown
    assert command
    monkeypatch.chdir(ROOT)
    result = CliRunner().invoke(main, shlex.split(command[1]))
    assert result.exit_code == 0
    assert shown[1] in result.stdout


@pytest.mark.parametrize("name", main.commands)
def test_every_command_stands_in_the_readme(name):
    assert f"`{name}" in README
    assert f"`{name}`" in README or f"`{name} SCENARIO" in README


def test_every_table_of_the_scenario_stands_in_the_readme():
    from collector.build.scenario import Scenario

    for name in Scenario.model_fields:
        assert name == "title" or f"[{name}]" in README


def test_files_that_the_prose_points_to_exist():
    for document in ("README.md", "DEVELOPERS.md"):
        text = (ROOT / document).read_text(encoding="utf-8")
        for target in re.findall(r"\]\(([^)#]+)\)", text):
            assert (ROOT / target).exists(), target
        for target in re.findall(r"`((?:tests|collector|weather|scenarios)/[\w./]+)`", text):
            assert (ROOT / target).exists(), target


def test_the_gate_runs_the_readmes_own_test_command():
    gate = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    assert "grep -m 1 'python -m pytest' README.md" in gate
    assert README.count("python -m pytest -n auto\n") == 1


def test_every_option_of_every_command_has_help():
    for name, command in main.commands.items():
        assert command.help, name
        for option in command.params:
            assert isinstance(option, click.Argument) or option.help, (name, option.name)


def test_the_version_is_the_packages():
    from importlib.metadata import version

    from collector.cli import VERSION

    assert version("noonplate") == VERSION
