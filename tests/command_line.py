"""The command line as a test calls it."""

from __future__ import annotations

from click.testing import CliRunner, Result

from unlanded.cli import main


def run(*words: object) -> Result:
    """The result of `unlanded` with these words; a traceback is never one."""
    result = CliRunner().invoke(main, [str(w) for w in words])
    assert "Traceback" not in result.output
    return result
