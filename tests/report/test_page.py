"""report.html in a browser without a network: every part drawn, linked, reachable and true."""

from __future__ import annotations

import json
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from playwright.sync_api import Browser, Page, sync_playwright

from hedgerow.units import number_text, percent_text
from pages import CHROMIUM, RULE, run_folder

pytestmark = pytest.mark.skipif(
    not CHROMIUM.exists(), reason=f"NO BROWSER: {CHROMIUM} is not installed, so the page was NOT looked at"
)

RULES = (Path(__file__).parent / "accessible.js").read_text(encoding="utf-8")
TIMES = ("growth", "drawdown", "calendar", "sources", "volatility")
CHARTS = (*TIMES, "spread", "outcomes", "draws", "premium", "timing", "odds", "ahead")
PARTS = ("answer", "growth-part", "results-part", "belief", "trades", "assumptions")
NASTY = '<script>alert("1")</script>'


@pytest.fixture(scope="module")
def browser() -> Iterator[Browser]:
    """Debian's chromium, without a window."""
    with sync_playwright() as driver:
        browser = driver.chromium.launch(executable_path=str(CHROMIUM))
        yield browser
        browser.close()


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A run of three variants on two symbols."""
    return run_folder(tmp_path_factory.mktemp("page"))


class Looked:
    """A page opened in the browser, and what it said or asked for meanwhile."""

    def __init__(self, browser: Browser, file: Path, width: int = 1280, dark: bool = False) -> None:
        scheme: Any = "dark" if dark else "light"
        self.context = browser.new_context(
            viewport={"width": width, "height": 900},
            color_scheme=scheme,
            offline=True,
            reduced_motion="reduce",
        )
        self.page: Page = self.context.new_page()
        self.said: list[str] = []
        self.page.on("console", lambda message: self.said.append(message.text))
        self.page.on("pageerror", lambda error: self.said.append(str(error)))
        self.page.on("dialog", lambda dialog: self.said.append(dialog.message))
        self.page.on(
            "request", lambda request: self.said.append(request.url) if request.url != file.as_uri() else None
        )
        self.page.goto(file.as_uri())
        self.page.wait_for_selector("html[data-drawn=yes]", timeout=20_000)

    def ask(self, script: str, *given: Any) -> Any:
        """What a script says in the page."""
        return self.page.evaluate(script, *given)


@pytest.fixture(scope="module")
def look(browser: Browser, folder: Path) -> Iterator[Looked]:
    """The report, opened once."""
    looked = Looked(browser, folder / "report.html")
    yield looked
    looked.context.close()


@pytest.fixture
def page(look: Looked) -> Iterator[Page]:
    """The open report with no filter set and nothing marked."""
    look.page.evaluate("document.getElementById('clear')?.click()")
    yield look.page
    look.page.evaluate("document.querySelector('dialog[open]')?.close()")


def rows(page: Page, column: int) -> list[str]:
    """The cells of one column of the ledger's rows in sight."""
    cells = page.locator(f".sheet .body .row > :nth-child({column})")
    return cells.all_text_contents()


def count(page: Page) -> int:
    """How many trades the ledger says it shows."""
    return int(page.locator(".sheet [role=grid]").get_attribute("aria-rowcount") or "0") - 1


def test_every_part_is_there_and_drawn(look: Looked) -> None:
    """Every section has text, every chart marks; nothing was fetched, nothing said on the console."""
    for part in PARTS:
        assert len(look.page.locator(f"#{part}").inner_text()) > 40, part
    for chart in CHARTS:
        drawn = look.page.locator(f"#{chart} .plot :is(path, rect, circle, td button)").count()
        assert drawn > 0 or look.page.locator(f"#{chart} .empty").count() == 1, chart
    assert look.page.locator(".plot .empty").count() <= 1
    assert look.page.locator("aside.cautions").inner_text().count("\n") > 6
    assert look.said == []


def test_figures_are_those_of_summary_json(look: Looked, folder: Path) -> None:
    """Every figure of the compact table and of the verdict, read back from the page, against summary.json."""
    told = json.loads((folder / "summary.json").read_text(encoding="utf-8"))
    shown = look.ask(
        "[...document.querySelectorAll('#scores tbody tr')]"
        ".map(row => [...row.children].map(cell => cell.textContent.trim()))"
    )
    assert [row[0] for row in shown] == [*told["variants"], "buy and hold"]
    for row in shown[:-1]:
        one = told["variants"][row[0]]
        value = {name: figure["value"] for name, figure in one["account"].items()}
        pair = next(p for p in told["evidence"]["against_yardstick"] if p["first"] == row[0])
        gap = {name: pair["growth"][name]["value"] for name in ("difference", "low", "high")}
        assert row[1] == percent_text(value["growth_a_year"], 1, True)
        assert row[2].split() == [percent_text(gap["difference"], 1, True), *pair["verdict"].split()]
        assert row[3] == f"{percent_text(gap['low'], 1, True)} to {percent_text(gap['high'], 1, True)}"
        assert row[4] == number_text(value["sharpe"])
        assert row[5] == percent_text(value["deepest_drawdown"])
        assert row[6] == percent_text(one["win_rate"]["value"])
        assert row[7] == percent_text(one["break_even_win_rate"]["value"])
        assert row[8] == f"{one['positions']['value']:,}"
        assert row[9] == number_text(value["last_value"], 0)
    assert look.page.locator("#verdict").inner_text() == told["evidence"]["verdict"]["headline"]


def test_charts_say_what_summary_json_says(look: Looked, folder: Path) -> None:
    """Outcomes by variant, growth and the year ahead, read from the charts' own columns, against the file."""
    told = json.loads((folder / "summary.json").read_text(encoding="utf-8"))["variants"]
    label = look.page.locator("#outcomes svg").get_attribute("aria-label") or ""
    for outcome, positions in told["short"]["outcomes"]["value"].items():
        assert (f"{outcome} {positions}," in label) == (positions > 0)
    growth = look.page.locator("#growth svg").get_attribute("aria-label") or ""
    for name, one in told.items():
        account = one["account"]
        times = account["last_value"]["value"] / account["first_value"]["value"]
        assert f"{name} {number_text(times)} times its start" in growth


def test_sorting_changes_the_order(page: Page) -> None:
    """The result column, largest first, then smallest first: numbers in order both ways."""
    heading = page.get_by_role("columnheader", name="Result, money")
    heading.get_by_role("button").click()
    assert heading.get_attribute("aria-sort") == "descending"
    down = [float(text.replace(",", "")) for text in rows(page, 6)]
    assert down == sorted(down, reverse=True)
    heading.get_by_role("button").click()
    up = [float(text.replace(",", "")) for text in rows(page, 6)]
    assert up == sorted(up)
    assert up[0] < down[0]


def test_filters_and_search_leave_what_they_should(page: Page, folder: Path) -> None:
    """Counts by variant, symbol and outcome against trades.csv; search narrows by any word."""
    import pandas as pd

    trades = pd.read_csv(folder / "trades.csv")
    assert count(page) == len(trades)
    form = page.locator("#filters")
    form.get_by_label("Variant").select_option("cut")
    assert count(page) == int((trades["variant"] == "cut").sum())
    form.get_by_label("Outcome").select_option("cut")
    wanted = trades[(trades["variant"] == "cut") & (trades["outcome"] == "cut")]
    assert count(page) == len(wanted) > 0
    assert set(rows(page, 8)) == {"cut"}
    page.locator("#clear").click()
    assert count(page) == len(trades)
    form.get_by_label("Search").fill("cut at 1%")
    assert count(page) == int((trades["reason"] == "cut at 1%").sum())
    form.get_by_label("Search").fill("2015-03")
    months = trades["opened"].str.startswith("2015-03") | trades["closed"].fillna("").str.startswith(
        "2015-03"
    )
    assert count(page) == int(months.sum())
    form.get_by_label("Search").fill("no such word")
    assert "No trade passes" in page.locator(".sheet .body").inner_text()


def test_a_row_marked_in_the_ledger_is_marked_in_the_charts(page: Page) -> None:
    """Space marks the active row: a dot on the growth curve of that trade, a dot under its result."""
    page.locator(".sheet").focus()
    page.keyboard.press("ArrowDown")
    page.keyboard.press("Space")
    trade = page.locator("#active-row").get_attribute("data-trade")
    assert page.locator("#active-row").get_attribute("aria-selected") == "true"
    assert page.locator(f'#growth .mark-trade[data-trade="{trade}"]').count() == 1
    assert page.locator("#growth .held").count() == 1
    page.keyboard.press("Space")
    assert page.locator("#growth .mark-trade").count() == 0


def test_a_chart_chooses_the_rows(page: Page, folder: Path) -> None:
    """A bar of the outcomes, a bar of the results and a month each leave their own trades, marked."""
    import pandas as pd

    trades = pd.read_csv(folder / "trades.csv")
    page.locator("#outcomes g.hit").first.click()
    outcome = page.locator("#outcomes g.hit").first.get_attribute("data-outcome")
    wanted = trades[(trades["variant"] == "short") & (trades["outcome"] == outcome)]
    assert count(page) == len(wanted) > 0
    assert page.locator('.sheet .row[aria-selected="true"]').count() > 0
    assert page.locator("#growth .mark-trade").count() == len(wanted)
    page.locator("#clear").click()
    page.get_by_role("button", name="Mar 2015").click()
    assert count(page) == int(
        (trades["closed"].fillna("").str.startswith("2015-03") & (trades["variant"] == "short")).sum()
    )
    page.locator("#clear").click()
    page.locator("#growth svg").focus()
    page.keyboard.press("Home")
    for _ in range(3):
        page.keyboard.press("Shift+ArrowUp")
    assert 0 < count(page) < len(trades)


def test_a_trade_opens_its_own_picture(page: Page, folder: Path) -> None:
    """Enter opens it: path, gain, payoff, every event as the log tells it; escape closes it."""
    from hedgerow.events import read_logs
    from hedgerow.events.narrate import story

    page.locator(".sheet").focus()
    page.keyboard.press("End")
    page.keyboard.press("Enter")
    page.wait_for_selector("dialog[open] ol li")
    places = [
        (log, int(one)) for log in read_logs(folder / "events.parquet") for one in log.terms["position"]
    ]
    for _ in range(25):
        trade = int(page.locator("dialog").get_attribute("data-trade") or -1)
        assert page.locator("dialog ol li").all_text_contents() == story(*places[trade])
        page.get_by_role("button", name="Before").click()
        page.wait_for_function(f"document.getElementById('picture').dataset.trade !== '{trade}'")
    assert page.locator("dialog .plot svg").count() == 3
    assert page.locator("dialog .plot .line").count() >= 3
    page.keyboard.press("Escape")
    assert page.locator("dialog[open]").count() == 0
    assert page.evaluate("document.activeElement.className") == "sheet"


def test_the_keyboard_alone_reaches_everything(page: Page) -> None:
    """Tab from the top comes by every link, control, chart and the ledger; arrow keys read a chart."""
    page.evaluate("document.activeElement.blur(); window.scrollTo(0, 0)")
    wanted = page.evaluate(
        "[...document.querySelectorAll('a[href], button, input, select, summary, [tabindex=\"0\"]')]"
        ".filter(n => n.checkVisibility()).map((n, at) => (n.dataset.stop = at))"
    )
    reached = set()
    for _ in range(len(wanted) + 5):
        page.keyboard.press("Tab")
        reached.add(page.evaluate("Number(document.activeElement.dataset.stop ?? -1)"))
    assert reached >= set(wanted)
    for chart in ("growth", "spread", "premium", "ahead"):
        before = page.locator(f"#{chart} .readout").inner_text()
        page.locator(f"#{chart} svg").focus()
        page.keyboard.press("ArrowRight")
        page.keyboard.press("ArrowRight")
        assert page.locator(f"#{chart} .readout").inner_text() not in ("", before), chart


@pytest.mark.parametrize("dark", [False, True], ids=["light", "dark"])
def test_everybody_can_use_it(browser: Browser, folder: Path, dark: bool) -> None:
    """Names, roles, labels, headings, the contrast of every text; with a trade's picture and without."""
    looked = Looked(browser, folder / "report.html", dark=dark)
    looked.ask("document.querySelectorAll('details').forEach(d => { d.open = true; })")
    assert looked.ask(RULES) == []
    looked.page.locator(".sheet .body .row").first.click()
    looked.page.wait_for_selector("dialog[open] ol li")
    assert looked.ask(RULES) == []
    looked.context.close()


def test_the_rules_find_what_is_wrong(browser: Browser) -> None:
    """Negative control: a page with faint text, a nameless button and a skipped heading is told all three."""
    context = browser.new_context(offline=True)
    page = context.new_page()
    page.set_content(
        "<html lang='en'><title>t</title><main><h1>a</h1><h3>b</h3><button></button>"
        "<p style='color:#bbb;background:#fff'>faint</p><input></main></html>"
    )
    found = " ".join(page.evaluate(RULES))
    for words in ("skips a level", "<button", "faint", "<input"):
        assert words in found
    context.close()


@pytest.mark.parametrize("width", [360, 1600])
def test_narrow_and_wide(browser: Browser, folder: Path, width: int) -> None:
    """No sideways scrolling of the page, also with a trade open; every chart within its column."""
    looked = Looked(browser, folder / "report.html", width=width)
    assert looked.ask("document.documentElement.scrollWidth") <= width
    ends = looked.ask("[...document.querySelectorAll('.plot')].map(p => p.getBoundingClientRect().right)")
    assert max(ends) <= width + 1
    looked.page.locator(".sheet .body .row").first.click()
    looked.page.wait_for_selector("dialog[open] ol li")
    assert looked.ask(
        "document.querySelector('dialog').scrollWidth <= document.querySelector('dialog').clientWidth + 1"
    )
    assert looked.said == []
    looked.context.close()


def test_it_prints(look: Looked) -> None:
    """A PDF of several pages comes out."""
    look.page.emulate_media(media="print")
    printed = look.page.pdf(prefer_css_page_size=True)
    look.page.emulate_media(media="screen")
    assert printed.startswith(b"%PDF")
    assert (
        printed.count(b"/Type /Page\n") + printed.count(b"/Type /Page ") >= 3 or printed.count(b"/Page") >= 3
    )


def test_words_of_others_stay_text(browser: Browser, tmp_path: Path) -> None:
    """A study, a rule, a variant and a symbol named in markup: nothing runs, all is shown as written."""
    exits = {"exit": [{"name": NASTY, "if": {"loss": {"at_least": "1%"}}}]}
    rule = {**RULE, "name": f"{NASTY} & 'rule'", "about": '"><img src=x onerror=alert(1)>'}
    study = {
        "name": f"{NASTY} study",
        "question": "</script><b>?",
        "strategy": rule,
        "variants": {"</script>": {}, NASTY: exits},
    }
    place = run_folder(tmp_path, study, symbols="A<", sessions=120)
    looked = Looked(browser, place / "report.html")
    assert looked.page.locator("h1").inner_text() == f"{NASTY} study"
    assert looked.page.locator("#scores tbody th").first.inner_text() == "</script>"
    assert "<" in looked.page.locator("#filters").get_by_label("Symbol").inner_text()
    looked.page.locator("#filters").get_by_label("Outcome").select_option("cut")
    assert NASTY in rows(looked.page, 9)
    looked.page.locator(".sheet .body .row").first.click()
    looked.page.wait_for_selector("dialog[open] ol li")
    assert NASTY in looked.page.locator("dialog").inner_text()
    assert looked.ask("document.scripts.length") == 2
    assert looked.ask("document.images.length") == 0
    assert looked.said == []
    looked.context.close()


NEVER = {"accept": {"net_debit": {"at_most": "-60%"}}}
MANY = {f"call at {at / 10}%": {"legs.call.strike.from_spot": f"{at / 10}%"} for at in range(40)}


@pytest.mark.parametrize(
    ("study", "trades"),
    [
        ({"variants": {"a": NEVER, "b": NEVER | {"fill": "close"}}}, False),
        ({"variants": MANY, "evidence": "none"}, True),
    ],
    ids=["no trade", "forty variants"],
)
def test_little_and_much_give_a_good_page(
    browser: Browser, tmp_path: Path, study: dict[str, Any], trades: bool
) -> None:
    """No trade and no evidence is told in words, forty variants are drawn; nothing overflows or complains."""
    looked = Looked(browser, run_folder(tmp_path, study, sessions=100) / "report.html", width=800)
    assert looked.ask("document.documentElement.scrollWidth") <= 800
    assert (count(looked.page) > 0) == trades
    if not trades:
        assert "No position was opened" in looked.page.locator("#trades").inner_text()
        assert "No position was opened" in looked.page.locator("#spread").inner_text()
    else:
        assert looked.page.locator("#growth .line").count() == 41
        assert "No evidence was worked out" in looked.page.locator("#belief").inner_text()
    assert looked.said == []
    looked.context.close()
