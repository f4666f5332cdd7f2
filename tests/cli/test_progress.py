"""The progress bar: what a terminal gets to see, and what a file does not."""

from __future__ import annotations

import io
import threading
import time

import pytest

from hedgerow.cli.progress import SHOWN_AFTER_SECONDS, progress


class Terminal(io.StringIO):
    """A stream that says it is a terminal and keeps what is written."""

    def isatty(self) -> bool:
        """Whether this is a terminal: it says so."""
        return True


@pytest.fixture(autouse=True)
def _ordinary_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    """A terminal that can move its cursor, 100 columns wide, whatever runs the tests."""
    monkeypatch.setenv("TERM", "xterm")
    monkeypatch.setenv("COLUMNS", "100")
    monkeypatch.delenv("NO_COLOR", raising=False)


def wait_for(screen: Terminal, text: str) -> bool:
    """Whether `text` appears on the screen within ten seconds."""
    end = time.monotonic() + 10.0
    while text not in screen.getvalue() and time.monotonic() < end:
        time.sleep(0.01)
    return text in screen.getvalue()


def test_a_bar_shows_label_count_and_time_left() -> None:
    """What the bar is for: the label, pieces done of all, and a clock; drawn by rich on a terminal."""
    screen = Terminal()
    with progress("variants", 40, screen, after_seconds=0.0) as counter:
        counter.advance(7)
        assert wait_for(screen, "7/40")
        counter.advance()
        assert wait_for(screen, "8/40")
    assert "variants" in screen.getvalue()
    assert "-:--:--" in screen.getvalue() or "0:00:" in screen.getvalue()


def test_short_work_shows_nothing() -> None:
    """Work that ends before the two seconds are over leaves the screen as it was."""
    screen = Terminal()
    with progress("variants", 3, screen) as counter:
        counter.advance(3)
    assert (screen.getvalue(), counter.done, SHOWN_AFTER_SECONDS) == ("", 3, 2.0)


@pytest.mark.parametrize("term", ["xterm", "dumb"])
def test_a_file_or_a_dumb_terminal_gets_no_bar(monkeypatch: pytest.MonkeyPatch, term: str) -> None:
    """Output that goes to a file, and a terminal that cannot redraw, stay free of bars."""
    monkeypatch.setenv("TERM", term)
    screen = Terminal() if term == "dumb" else io.StringIO()
    with progress("variants", 3, screen, after_seconds=0.0) as counter:
        time.sleep(0.05)
        counter.advance()
    assert screen.getvalue() == ""


def test_interrupted_work_takes_its_bar_away() -> None:
    """After an interrupt the cursor is back, no thread draws on, and the interrupt reaches the caller."""
    screen, before = Terminal(), threading.active_count()

    def work() -> None:
        """Work until the bar is there, then be interrupted."""
        with progress("variants", 9, screen, after_seconds=0.0):
            assert wait_for(screen, "0/9")
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        work()
    assert screen.getvalue().rfind("\x1b[?25h") > screen.getvalue().rfind("\x1b[?25l")
    end = time.monotonic() + 10.0
    while threading.active_count() > before and time.monotonic() < end:
        time.sleep(0.01)
    assert threading.active_count() == before


def test_many_threads_count_without_loss() -> None:
    """Eight threads that count a thousand each make eight thousand (identity)."""
    with progress("variants", 8000, io.StringIO()) as counter:
        threads = [
            threading.Thread(target=lambda: [counter.advance() for _ in range(1000)]) for _ in range(8)
        ]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
    assert counter.done == 8000


def test_a_bar_asked_for_after_the_end_does_not_appear() -> None:
    """The timer may fire while the work ends: nothing is drawn then."""
    screen = Terminal()
    with progress("variants", 3, screen) as counter:
        pass
    counter.show()
    assert screen.getvalue() == ""
