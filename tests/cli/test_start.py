"""How the command ends when it is stopped: while it loads, and while a run is under way."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from cli_runs import Runner

pytestmark = pytest.mark.skipif(os.name != "posix", reason="signals to processes are tried on POSIX")

LOADING = "from hedgerow.cli.start import main\nprint('begins', flush=True)\nmain()"
"""What stands before is Python's own start, in which no program can answer a signal."""
SLOW = """\
import time, hedgerow.report.files as files
from hedgerow.cli.start import main
def slow(*_):
    print('begins', flush=True)
    time.sleep(20)
files.fill_folder = slow
main()
"""
DELAYS_SECONDS = (0.03, 0.06, 0.1, 0.15, 0.2, 0.3)
WORDS = {signal.SIGINT: "by the keyboard", signal.SIGTERM: "from outside"}


def started(code: str, *words: str, ignored: bool = False) -> subprocess.Popen[str]:
    """The command in a process of its own, whose code says when it begins."""

    def prepare() -> None:
        signal.signal(signal.SIGINT, signal.SIG_IGN if ignored else signal.default_int_handler)
        signal.signal(signal.SIGTERM, signal.SIG_IGN if ignored else signal.SIG_DFL)

    running = subprocess.Popen(
        [sys.executable, "-c", code, *words],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        preexec_fn=prepare,
    )
    assert running.stdout is not None
    assert running.stdout.readline() == "begins\n"
    return running


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
def test_stopped_while_it_loads(hedgerow: Runner, number: signal.Signals) -> None:
    """A signal at several moments after the first line of code: one line, 128 and its number, no file."""
    before = hedgerow.files()
    for delay in DELAYS_SECONDS:
        with started(LOADING, "run", "study.yaml", "--out", "mine") as running:
            time.sleep(delay)
            running.send_signal(number)
            _, err = running.communicate(timeout=30)
        assert running.returncode == 128 + number, (delay, err)
        assert err.startswith(f"Stopped {WORDS[number]}"), (delay, err)
        assert err.count("\n") == 1, (delay, err)
    assert hedgerow.files() == before


def test_ignored_signals_stay_ignored(hedgerow: Runner) -> None:
    """As under nohup: both signals come while it loads, and the command does its work all the same."""
    with started(LOADING, "rules", "check", "rule.yaml", ignored=True) as running:
        time.sleep(DELAYS_SECONDS[0])
        running.send_signal(signal.SIGINT)
        running.send_signal(signal.SIGTERM)
        _, err = running.communicate(timeout=30)
    assert (running.returncode, err) == (0, "")


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
def test_told_to_end_while_it_writes(hedgerow: Runner, number: signal.Signals) -> None:
    """A signal while the folder is half-written: it is taken away, in one line and with the signal's code."""
    before = hedgerow.files()
    with started(SLOW, "run", "study.yaml", "--out", "deep/mine") as running:
        assert list(Path("deep").iterdir())
        running.send_signal(number)
        _, err = running.communicate(timeout=30)
    assert running.returncode == 128 + number
    assert err == f"Stopped {WORDS[number]}: nothing was left half-written.\n"
    assert hedgerow.files() == before
