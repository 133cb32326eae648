"""What an accessibility checker (axe-core) says of the pages, light and dark, wide and narrow, and in use."""

import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import expect

from support.many_runs import run_rows, write_front
from support.unrendered import unrendered
from support.workspaces import DATA, STUDY, Bench

pytestmark = pytest.mark.needs("chromium")

FRONT, STUDY_PAGE, RUN_PAGE = (
    "index.html",
    "_register/studies/TST-1/index.html",
    "_register/studies/TST-1/run-0001.html",
)


@pytest.fixture(scope="module")
def runs(tmp_path_factory):
    """A register with every kind of page: a registered study with criteria, two runs, one altered folio."""
    bench = Bench(
        tmp_path_factory.mktemp("axe") / "w",
        STUDY + "precision: {estimate: true}\ncriteria:\n  - {quantity: repeatability-rsd, at-most: 0.1}\n",
    )
    with unrendered():
        assert bench("preregister", bench.study).code == 0
        for value in ("48.2", "48.3", "48.4"):
            bench.data.write_text(DATA.replace("48.2", value))
            assert bench("run", bench.study).code == 1
        assert (
            bench(
                "void",
                bench.runs / "TST-1/run-0002",
                "--reason",
                "Balance out of order",
                "--investigation",
                "I-1",
            ).code
            == 0
        )
        (bench.runs / "TST-1/run-0003/extra.txt").write_text("x")
        assert bench("index").code == 1
    return bench.runs


def violations(page) -> list[str]:
    results = Axe().run(page).response["violations"]
    return [f"{one['id']}: {one['help']}: {node['html'][:120]}" for one in results for node in one["nodes"]]


@pytest.mark.parametrize("path", [FRONT, STUDY_PAGE, RUN_PAGE])
@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("width", [1360, 390])
def test_nothing_is_found_wrong(chromium, runs, path, scheme, width):
    # The checker brings its script by a way that the pages forbid; that they do is another test's.
    context = chromium.new_context(
        color_scheme=scheme, viewport={"width": width, "height": 900}, bypass_csp=True
    )
    page = context.new_page()
    page.goto((runs / path).as_uri())
    assert violations(page) == []
    context.close()


def test_nothing_is_found_wrong_after_a_search_and_a_sort(chromium, tmp_path):
    front = write_front(tmp_path, run_rows(600))
    context = chromium.new_context(bypass_csp=True)
    page = context.new_page()
    page.goto(front.as_uri())
    page.fill("#f-text", "wax")
    page.click("th[data-sort=state] button")
    expect(page.locator("#count")).to_contain_text("match")
    assert violations(page) == []
    context.close()


def test_how_many_match_is_said_aloud(chromium, tmp_path):
    page = chromium.new_page()
    page.goto(write_front(tmp_path, run_rows(10)).as_uri())
    assert page.get_attribute("#count", "aria-live") == "polite"
    assert page.get_attribute("#count", "role") == "status"
    page.close()
