"""The register's pages in a real browser, opened from the disk as a laboratory opens them."""

import functools
import http.server
import re
import subprocess
import threading

import pytest
from playwright.sync_api import expect

from support.many_runs import run_rows, write_front

pytestmark = pytest.mark.needs("chromium")
PATIENCE = 60_000
THIN = "\u202f"


def opened(tab, page):
    tab.goto(page.as_uri())
    expect(tab.locator("#filter")).to_be_visible()
    return tab


def shown(tab) -> list[str]:
    """The runs in the table, in their order."""
    return tab.locator("#list tbody tr th a").all_inner_texts()


def told(tab, words: str) -> None:
    expect(tab.locator("#count")).to_contain_text(words, timeout=PATIENCE)


def names(rows) -> list[str]:
    return [f"{row.study} {row.name}" for row in rows]


class TestFiftyThousandRuns:
    def test_the_newest_hundred_are_there_at_once(self, tab, many):
        opened(tab, many)
        assert shown(tab) == names(reversed(run_rows(50_000)[-100:]))
        told(tab, f"The newest 100 of 50{THIN}000 runs.")

    def test_a_search_goes_over_all_of_them(self, tab, many):
        opened(tab, many)
        tab.fill("#f-text", "L000007")
        told(tab, f"1 of 50{THIN}000 runs match.")
        assert shown(tab) == names([run_rows(7)[-1]])

    def test_words_are_searched_one_by_one_and_filters_narrow_them(self, tab, many):
        opened(tab, many)
        tab.fill("#f-text", "iris raw milk")
        tab.select_option("#f-criteria", "not met")
        tab.fill("#f-from", "2031-01-01")
        wanted = [
            row
            for row in reversed(run_rows(50_000))
            if row.by.startswith("Iris") and row.study == "MLK-001" and row.criteria.startswith("not met")
            if row.time[:10] >= "2031-01-01"
        ]
        told(tab, f"{len(wanted)} of 50{THIN}000 runs match")
        assert shown(tab) == names(wanted[:100])

    def test_sorting_orders_all_of_them(self, tab, many):
        opened(tab, many)
        tab.click("th[data-sort=folio] button")
        told(tab, f"50{THIN}000 runs; shown 1 to 100")
        first = tab.locator("#list tbody tr:first-child td").nth(5)
        expect(first).to_have_text("changed")
        changed = [row for row in reversed(run_rows(50_000)) if row.folio == "changed"]
        assert shown(tab)[: len(changed)] == names(changed)

    def test_later_pages_are_turned_to(self, tab, many):
        opened(tab, many)
        tab.click("#p-older")
        told(tab, "shown 101 to 200")
        assert shown(tab) == names(reversed(run_rows(50_000)[-200:-100]))
        expect(tab.locator("#p-where")).to_have_text("Page 2 of 500")

    def test_a_label_with_markup_in_it_stays_text(self, tab, many):
        opened(tab, many)
        tab.fill("#f-text", "onerror")
        told(tab, "runs match")
        assert tab.locator("#list tbody img").count() == 0
        assert (
            tab.locator("#list tbody .under bdi").first.inner_text().startswith("<img src=x onerror=alert(")
        )


class TestSearching:
    def test_no_match_is_said(self, tab, some):
        opened(tab, some)
        tab.fill("#f-text", "no such words")
        told(tab, f"0 of 1{THIN}234 runs match.")
        expect(tab.locator("#list tbody")).to_have_text("No run matches.")

    def test_clearing_brings_all_back_and_the_cursor_to_the_search(self, tab, some):
        opened(tab, some)
        tab.fill("#f-text", "void")
        told(tab, "match")
        tab.click("#f-clear")
        told(tab, f"1{THIN}234 runs; shown 1 to 100.")
        expect(tab.locator("#f-text")).to_be_focused()

    def test_the_address_keeps_what_was_asked(self, tab, some):
        opened(tab, some)
        tab.fill("#f-text", "wax")
        tab.select_option("#f-state", "void")
        tab.click("th[data-sort=run] button")
        told(tab, "match")
        before, address = shown(tab), tab.url
        tab.goto("about:blank")
        tab.goto(address)
        told(tab, "match")
        assert shown(tab) == before
        assert tab.input_value("#f-text") == "wax"
        assert tab.get_attribute("th[data-sort=run]", "aria-sort") == "ascending"

    def test_a_second_click_turns_the_order_round(self, tab, some):
        opened(tab, some)
        tab.click("th[data-sort=run] button")
        told(tab, "shown 1 to 100")
        expect(tab.locator("#list tbody tr:first-child th a")).to_have_text("MLK-001 run-0001")
        tab.click("th[data-sort=run] button")
        expect(tab.locator("#list tbody tr:first-child th a")).to_have_text("WAX-077 run-0247")
        assert tab.get_attribute("th[data-sort=run]", "aria-sort") == "descending"

    @pytest.mark.parametrize(
        ("field", "value", "cell", "wanted"),
        [
            ("study", "OIL-014", "th a", "OIL-014 run-"),
            ("state", "in review", "td:nth-child(3)", "in review"),
            ("overall", "difference not shown", "td:nth-child(4)", "difference not shown"),
            ("criteria", "met", "td:nth-child(5)", "met (3 of 3)"),
            ("folio", "changed", "td:nth-child(7)", "changed"),
        ],
    )
    def test_a_filter_leaves_only_what_it_names(self, tab, some, field, value, cell, wanted):
        opened(tab, some)
        tab.select_option(f"#f-{field}", value)
        told(tab, "match")
        texts = tab.locator(f"#list tbody tr {cell}").all_inner_texts()
        assert texts
        assert all(text.startswith(wanted) for text in texts)

    def test_a_data_file_that_is_gone_is_told(self, chromium, tmp_path):
        front = write_front(tmp_path, run_rows(1_234))
        (tmp_path / "_register/data/runs-0002.js").unlink()
        page = chromium.new_page()
        opened(page, front)
        page.fill("#f-text", "run")
        told(page, "1 data files could not be read")
        page.close()


class TestOpening:
    def test_report_findings_and_folio_are_beside_the_register(self, tab, some):
        opened(tab, some)
        tab.fill("#f-text", "approved")
        told(tab, "match")
        first = shown(tab)[0].replace(" ", "/")
        links = tab.locator("#list tbody tr:first-child .open a")
        assert [link.get_attribute("href") for link in links.all()] == [
            f"{first}/data/report.pdf",
            f"{first}/data/findings.json",
            f"{first}/",
        ]
        assert links.first.get_attribute("aria-label").startswith("Report of ")

    def test_rows_drawn_by_the_script_are_those_of_the_plain_page(self, tab, some):
        opened(tab, some)
        plain = tab.locator("#list tbody").inner_html()
        tab.click("th[data-sort=run] button")
        told(tab, "shown")
        tab.click("#f-clear")
        tab.click("th[data-sort=time] button")
        tab.click("th[data-sort=time] button")
        expect(tab.locator("th[data-sort=time]")).to_have_attribute("aria-sort", "descending")
        expect(tab.locator("#list tbody tr:first-child th a")).to_have_text(names([run_rows(1_234)[-1]])[0])
        drawn = tab.locator("#list tbody").inner_html()
        assert squeezed(drawn) == squeezed(plain)


def squeezed(html: str) -> str:
    """Markup without what does not show: blanks between and inside elements, empty classes."""
    html = re.sub(r' class=""', "", html)
    return re.sub(r"\s*(<[^>]+>)\s*", r"\1", re.sub(r"\s+", " ", html))


class TestWithoutScripts:
    def test_the_newest_runs_are_a_readable_table_and_nothing_waits(self, chromium, many):
        context = chromium.new_context(java_script_enabled=False)
        page = context.new_page()
        page.goto(many.as_uri())
        assert page.locator("#list tbody tr").count() == 100
        assert not page.locator("#filter").is_visible()
        assert not page.locator("#pager").is_visible()
        context.close()


class TestServed:
    """Over HTTP a page can look at the trail's head."""

    def test_a_page_that_is_older_than_the_trail_says_so(self, chromium, tmp_path):
        class Quiet(http.server.SimpleHTTPRequestHandler):
            def log_message(self, *_):
                pass

        write_front(tmp_path, run_rows(10))
        (tmp_path / "audit-trail.head").write_text('{"seq":52,"sha256":"' + "1" * 64 + '"}\n')
        handler = functools.partial(Quiet, directory=str(tmp_path))
        with http.server.ThreadingHTTPServer(("127.0.0.1", 0), handler) as server:
            threading.Thread(target=server.serve_forever, daemon=True).start()
            page = chromium.new_page()
            page.goto(f"http://127.0.0.1:{server.server_port}/index.html")
            notice = page.locator("main .notice")
            expect(notice).to_contain_text("it has 12 more entries than these pages know")
            page.close()
            server.shutdown()


class TestKeyboard:
    def test_reaches_search_filters_columns_and_links_in_order(self, tab, some):
        opened(tab, some)
        tab.keyboard.press("Tab")
        expect(tab.locator(".skip")).to_be_focused()
        seen = []
        for _ in range(32):
            tab.keyboard.press("Tab")
            seen.append(
                tab.evaluate("() => document.activeElement.id || document.activeElement.textContent.trim()")
            )
        wanted = ["f-text", "f-study", "f-state", "f-overall", "f-criteria", "f-folio", "f-clear"]
        assert [one for one in seen if one in wanted] == wanted
        assert seen.index("f-clear") < seen.index("Run") < seen.index("Overall verdict")

    def test_a_column_is_sorted_by_the_keyboard(self, tab, some):
        opened(tab, some)
        tab.focus("th[data-sort=state] button")
        tab.keyboard.press("Enter")
        told(tab, "shown")
        expect(tab.locator("th[data-sort=state]")).to_have_attribute("aria-sort", "ascending")
        expect(tab.locator("th[data-sort=state] button")).to_be_focused()

    def test_the_focus_is_seen(self, tab, some):
        opened(tab, some)
        tab.keyboard.press("Tab")
        tab.keyboard.press("Tab")
        style = tab.evaluate("() => getComputedStyle(document.activeElement).outlineStyle")
        assert style == "solid"


class TestPrinted:
    def test_the_list_is_printed_without_what_only_a_screen_needs(self, tab, some):
        opened(tab, some)
        tab.emulate_media(media="print")
        assert not tab.locator("#filter").is_visible()
        assert not tab.locator("#pager").is_visible()
        assert tab.locator("#list thead th").last.is_hidden()
        assert tab.locator("#list tbody tr").first.is_visible()

    @pytest.mark.needs("pdftotext")
    def test_the_head_of_the_table_is_on_every_printed_page(self, tab, some, tmp_path):
        opened(tab, some)
        tab.pdf(path=tmp_path / "list.pdf", prefer_css_page_size=True)
        text = subprocess.run(
            ["pdftotext", "-layout", tmp_path / "list.pdf", "-"], capture_output=True, text=True, check=True
        ).stdout
        sheets = [sheet for sheet in text.split("\f") if re.search(r"run-\d{4} +2", sheet)]
        assert len(sheets) > 1
        assert all("Overall verdict" in sheet for sheet in sheets)


class TestLightAndDark:
    def test_follow_the_readers_system(self, chromium, some):
        grounds = []
        for scheme in ("light", "dark"):
            context = chromium.new_context(color_scheme=scheme)
            page = context.new_page()
            page.goto(some.as_uri())
            grounds.append(page.evaluate("() => getComputedStyle(document.documentElement).backgroundColor"))
            context.close()
        assert grounds == ["rgb(255, 255, 255)", "rgb(19, 24, 27)"]

    def test_the_projects_own_type_is_loaded(self, tab, some):
        opened(tab, some)
        loaded = tab.evaluate(
            "async () => { await document.fonts.ready; return [...document.fonts].map(f => f.status) }"
        )
        assert loaded == ["loaded", "loaded"]
