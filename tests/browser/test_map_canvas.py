"""The map and the ruler in a real Chromium, on invented networks, without Dash."""

from __future__ import annotations

import time
from collections.abc import Iterator
from typing import Any

import pytest
from map_page import serve
from playwright.sync_api import Browser, Page

pytestmark = pytest.mark.browser

READY = "Boolean(window.tried && tried.ready && !corymb.map.stats().waiting)"

# The colour of one pixel of a layer, as [red, green, blue, alpha]
PIXEL = """([layer, x, y]) => {
  const spot = Object.assign(document.createElement("canvas"), { width: 1, height: 1 });
  const context = spot.getContext("2d", { willReadFrequently: true });
  const from = [Math.round(x * devicePixelRatio), Math.round(y * devicePixelRatio), 1, 1];
  context.drawImage(document.querySelector(`canvas[data-layer=${layer}]`), ...from, 0, 0, 1, 1);
  return Array.from(context.getImageData(0, 0, 1, 1).data);
}"""

# Genes that stand alone on the screen and under no plate, card or other disc, with their places
ALONE = """() => {
  const { plates, nodes } = corymb.map.stats();
  const places = Array.from({ length: nodes }, (_, gene) => corymb.map.where(gene));
  const box = document.getElementById("map").getBoundingClientRect();
  const isFree = ({ x, y }, gene) => document.elementFromPoint(x + box.left, y + box.top)?.id === "map"
    && plates.every((p) => x < p.left - 4 || x > p.left + p.width + 4 || y < p.top - 4 || y > p.top + p.height + 4)
    && places.every((other, index) => index === gene || Math.hypot(other.x - x, other.y - y) > 13);
  return places.map((place, gene) => ({ gene, ...place })).filter((place) => isFree(place, place.gene));
}"""


# Places of the map away from every disc and plate
BETWEEN = """() => {
  const { plates, nodes } = corymb.map.stats();
  const discs = Array.from({ length: nodes }, (_, gene) => corymb.map.where(gene));
  const found = [];
  for (let x = 60; x < 820; x += 9) for (let y = 60; y < 510; y += 9) {
    if (plates.every((p) => x < p.left - 4 || x > p.left + p.width + 4 || y < p.top - 4 || y > p.top + p.height + 4)
      && discs.every((disc) => Math.hypot(disc.x - x, disc.y - y) > 10)) found.push([x, y]);
  }
  return found;
}"""


@pytest.fixture(scope="module")
def address(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """Serve the page with an invented network of 906 and one of 50 genes."""
    data = tmp_path_factory.mktemp("data")
    serve.make_data(data, ["906", "50"])
    with serve.served(data) as url:
        yield url


@pytest.fixture
def page(browser: Browser, address: str) -> Iterator[Page]:
    """Open the page with 906 genes; afterwards the console must have been silent and no other host asked."""
    opened = browser.new_page(viewport={"width": 1366, "height": 768})
    said: list[str] = []
    asked: list[str] = []
    opened.on("console", lambda message: said.append(message.text))
    opened.on("pageerror", lambda error: said.append(str(error)))
    opened.on("request", lambda request: asked.append(request.url))
    opened.goto(f"{address}?data=906")
    until(opened, READY)
    yield opened
    opened.close()
    assert said == []
    assert [url for url in asked if not url.startswith((address, "blob:", "data:"))] == []


def until(page: Page, expression: str, seconds: float = 20.0) -> Any:
    """Wait until an expression holds. The page's content policy forbids playwright's own way of waiting."""
    end = time.monotonic() + seconds
    while not (answer := page.evaluate(expression)):
        assert time.monotonic() < end, f"still not: {expression}"
        page.wait_for_timeout(25)
    return answer


def at_rest(page: Page) -> dict[str, Any]:
    """Let the layers be drawn anew after a gesture; return the map's counts."""
    page.wait_for_timeout(120)
    until(page, READY)
    return dict(page.evaluate("corymb.map.stats()"))


def on_page(page: Page, x: float, y: float) -> tuple[float, float]:
    """Turn a place of the map into a place of the page."""
    left, top = page.evaluate("(({left, top}) => [left, top])(document.getElementById('map').getBoundingClientRect())")
    return x + left, y + top


def hue_of(page: Page, module: int, kind: str = "coarse") -> list[int]:
    """Return red, green, blue of a module's colour, from the style sheet."""
    name = page.evaluate("([kind, module]) => tried[kind].hues[module]", [kind, module])
    value = page.evaluate(
        "name => getComputedStyle(document.documentElement).getPropertyValue(name)", name.removeprefix("var(")[:-1]
    )
    return [int(value.strip()[place : place + 2], 16) for place in (1, 3, 5)]


def test_every_part_is_there(page: Page) -> None:
    stats = page.evaluate("corymb.map.stats()")
    assert (stats["nodes"], stats["edges"]) == (906, 2871)
    assert stats["edgeDraws"] == 1
    assert 15 <= len(stats["plates"]) <= 48
    layers = page.evaluate("Array.from(document.querySelectorAll('#map canvas'), (canvas) => canvas.dataset.layer)")
    assert layers == ["edges", "shading", "nodes", "labels"]
    label = page.get_attribute("#map", "aria-label") or ""
    assert "906 genes, 2871 interactions" in label
    assert page.evaluate("document.documentElement.scrollHeight <= innerHeight")


def test_discs_have_their_modules_colour_and_the_shading_lies_behind(page: Page) -> None:
    alone = page.evaluate(ALONE)
    assert len(alone) > 100
    labels = page.evaluate("Array.from(tried.coarse.labels)")
    grey = page.evaluate("tried.coarse.grey")
    shaded = [place for place in alone if not grey[labels[place["gene"]]]]
    for place in shaded[:40]:
        hue = hue_of(page, labels[place["gene"]])
        *disc, opacity = page.evaluate(PIXEL, ["nodes", place["x"], place["y"]])
        assert opacity == 255
        assert max(abs(one - two) for one, two in zip(disc, hue, strict=True)) <= 8
        *behind, strength = page.evaluate(PIXEL, ["shading", place["x"], place["y"]])
        assert 30 < strength < 140
        assert max(abs(one - two) for one, two in zip(behind, hue, strict=True)) <= 24


def test_edges_are_drawn_thinly(page: Page) -> None:
    opacities = page.evaluate("""() => {
      const canvas = document.querySelector("canvas[data-layer=edges]");
      const { data } = canvas.getContext("2d").getImageData(0, 0, canvas.width, canvas.height);
      const found = data.filter((_, index) => index % 4 === 3);
      return { drawn: found.filter(Boolean).length / found.length, most: found.reduce((a, b) => Math.max(a, b)) };
    }""")
    assert 0.1 < opacities["drawn"] < 0.9
    assert opacities["most"] < 160


def test_recolouring_leaves_the_edges_alone(page: Page) -> None:
    before = page.evaluate("corymb.map.stats()")
    labels = page.evaluate("[Array.from(tried.coarse.labels), Array.from(tried.finer.labels)]")
    changed = next(place for place in page.evaluate(ALONE) if labels[0][place["gene"]] != labels[1][place["gene"]])
    page.evaluate("corymb.map.colour(tried.finer)")
    after = at_rest(page)
    assert after["edgeDraws"] == before["edgeDraws"]
    assert after["nodeDraws"] == before["nodeDraws"] + 1
    *disc, _ = page.evaluate(PIXEL, ["nodes", changed["x"], changed["y"]])
    hue = hue_of(page, labels[1][changed["gene"]], "finer")
    assert max(abs(one - two) for one, two in zip(disc, hue, strict=True)) <= 8


def test_a_click_picks_the_gene_under_it(page: Page) -> None:
    for place in page.evaluate(ALONE)[::25]:
        page.mouse.click(*on_page(page, place["x"] + 1, place["y"] - 1))
        assert page.evaluate("tried.heard.picks.at(-1)") == {"kind": "gene", "index": place["gene"]}
        until(page, READY)


def test_a_click_on_plate_shading_or_paper(page: Page) -> None:
    for plate in page.evaluate("corymb.map.stats().plates")[2:6]:
        middle = (plate["left"] + plate["width"] / 2, plate["top"] + plate["height"] / 2)
        page.mouse.click(*on_page(page, *middle))
        assert page.evaluate("tried.heard.picks.at(-1)") == {"kind": "module", "index": plate["module"]}
        until(page, READY)
    hue = hue_of(page, 0)
    shaded = [spot for spot in page.evaluate(BETWEEN) if _is_hue(page.evaluate(PIXEL, ["shading", *spot]), hue)]
    assert len(shaded) > 10
    for spot in shaded[:: len(shaded) // 5]:
        page.mouse.click(*on_page(page, *spot))
        picked = page.evaluate("tried.heard.picks.at(-1)")
        assert picked["kind"] == "module"
        assert page.evaluate("index => tried.coarse.hues[index]", picked["index"]) == "var(--module-1)"
        until(page, READY)
    page.mouse.click(*on_page(page, 8, 300))
    assert page.evaluate("tried.heard.picks.at(-1)") == {"kind": "nothing", "index": -1}


def _is_hue(pixel: list[int], hue: list[int]) -> bool:
    return pixel[3] > 40 and max(abs(one - two) for one, two in zip(pixel, hue, strict=False)) <= 12


def test_picking_is_right_after_a_zoom(page: Page) -> None:
    page.evaluate("corymb.map.focus({ module: 2 })")
    page.wait_for_timeout(650)
    assert at_rest(page)["zoom"] > 2
    alone = page.evaluate(ALONE)
    assert len(alone) > 10
    for place in alone[::6]:
        page.mouse.click(*on_page(page, place["x"], place["y"]))
        assert page.evaluate("tried.heard.picks.at(-1)") == {"kind": "gene", "index": place["gene"]}
        until(page, READY)


def test_the_mouse_pans_and_zooms(page: Page) -> None:
    before = page.evaluate("corymb.map.where(5)")
    edges = page.evaluate("corymb.map.stats().edgeDraws")
    start = on_page(page, 20, 300)
    page.mouse.move(*start)
    page.mouse.down()
    page.mouse.move(start[0] + 40, start[1] + 10, steps=4)
    page.mouse.move(start[0] + 80, start[1] - 30, steps=4)
    page.mouse.up()
    stats = at_rest(page)
    after = page.evaluate("corymb.map.where(5)")
    assert after["x"] - before["x"] == pytest.approx(80, abs=1)
    assert after["y"] - before["y"] == pytest.approx(-30, abs=1)
    assert stats["edgeDraws"] > edges
    assert page.evaluate("document.querySelector('.map-layers').style.transform") == ""
    assert page.evaluate("tried.heard.picks") == []
    page.mouse.wheel(0, -240)
    assert at_rest(page)["zoom"] > 1.2


def test_the_keys_pan_zoom_fit_and_pick(page: Page) -> None:
    page.focus("#map")
    before = page.evaluate("corymb.map.where(5)")
    page.keyboard.press("ArrowLeft")
    page.keyboard.press("ArrowUp")
    at_rest(page)
    after = page.evaluate("corymb.map.where(5)")
    assert after["x"] > before["x"]
    assert after["y"] > before["y"]
    page.keyboard.press("+")
    page.keyboard.press("+")
    closer = at_rest(page)["zoom"]
    page.keyboard.press("-")
    assert 1 < at_rest(page)["zoom"] < closer
    page.keyboard.press("0")
    page.wait_for_timeout(600)
    at_rest(page)
    assert page.evaluate("corymb.map.where(5)") == pytest.approx(before)
    page.evaluate("corymb.map.focus({ module: 3 })")
    page.wait_for_timeout(650)
    at_rest(page)
    page.keyboard.press("Enter")
    assert page.evaluate("tried.heard.picks.at(-1)") == {"kind": "module", "index": 3}


def test_a_hovered_gene_is_named(page: Page) -> None:
    place = page.evaluate(ALONE)[0]
    page.mouse.move(*on_page(page, place["x"], place["y"]))
    tip = page.locator(".map-tip")
    assert tip.is_visible()
    assert tip.inner_text().startswith(
        f"{page.evaluate('fetch(`/data/906/names`).then((a) => a.json())')[place['gene']]} degree "
    )
    page.mouse.move(*on_page(page, 8, 300))
    assert not tip.is_visible()


def test_choosing_a_module_strengthens_its_shading_only(page: Page) -> None:
    labels = page.evaluate("Array.from(tried.coarse.labels)")
    alone = page.evaluate(ALONE)
    third = next(place for place in alone if labels[place["gene"]] == 2)
    first = next(place for place in alone if labels[place["gene"]] == 0)

    def strength(place: dict[str, float]) -> int:
        return int(page.evaluate(PIXEL, ["shading", place["x"], place["y"]])[3])

    before = strength(third), strength(first)
    page.evaluate("corymb.map.select({ module: 2, genes: [] })")
    at_rest(page)
    assert strength(third) > 1.6 * before[0]
    assert strength(first) == before[1]


def test_confidence_replaces_the_modules_colours(page: Page) -> None:
    place = page.evaluate(ALONE)[0]
    page.evaluate("corymb.map.confidence(Float32Array.from({ length: 906 }, () => 1), true)")
    at_rest(page)
    *sure, _ = page.evaluate(PIXEL, ["nodes", place["x"], place["y"]])
    page.evaluate("corymb.map.confidence(Float32Array.from({ length: 906 }, () => 0), true)")
    at_rest(page)
    *unsure, _ = page.evaluate(PIXEL, ["nodes", place["x"], place["y"]])
    assert sum(unsure) > sum(sure) + 150  # lighter, so that hue is not needed
    page.evaluate("corymb.map.confidence(null, false)")
    at_rest(page)
    hue = hue_of(page, page.evaluate("gene => tried.coarse.labels[gene]", place["gene"]))
    *module, _ = page.evaluate(PIXEL, ["nodes", place["x"], place["y"]])
    grey = page.evaluate("gene => tried.coarse.grey[tried.coarse.labels[gene]]", place["gene"])
    assert grey or max(abs(one - two) for one, two in zip(module, hue, strict=True)) <= 8


def test_removed_genes_lose_their_disc_and_cannot_be_picked(page: Page) -> None:
    place = page.evaluate(ALONE)[0]
    gene = place["gene"]
    page.evaluate(f"corymb.map.remove(Uint8Array.from({{ length: 906 }}, (_, gene) => Number(gene === {gene})))")
    at_rest(page)
    assert page.evaluate(PIXEL, ["nodes", place["x"], place["y"]])[3] == 0
    page.mouse.click(*on_page(page, place["x"], place["y"]))
    assert page.evaluate("tried.heard.picks.at(-1).kind") != "gene"
    page.evaluate("corymb.map.remove(null)")
    at_rest(page)
    assert page.evaluate(PIXEL, ["nodes", place["x"], place["y"]])[3] == 255


def test_a_theme_repaints_the_map(page: Page) -> None:
    plate = page.evaluate("corymb.map.stats().plates")[3]
    spot = ["labels", plate["left"] + 4, plate["top"] + 4]
    light = page.evaluate(PIXEL, spot)
    edges = page.evaluate("corymb.map.stats().edgeDraws")
    page.evaluate("document.documentElement.dataset.theme = 'dark'")
    assert at_rest(page)["edgeDraws"] == edges + 1
    dark = page.evaluate(PIXEL, spot)
    assert min(light[:3]) > 230
    assert max(dark[:3]) < 60


def test_a_window_of_another_size(page: Page) -> None:
    page.set_viewport_size({"width": 1920, "height": 1080})
    at_rest(page)
    width, height = page.evaluate(
        "[document.getElementById('map').clientWidth, document.getElementById('map').clientHeight]"
    )
    assert width == 1920 - 492 - 1 or width == 1920 - 492
    canvas = page.evaluate("(({width, height}) => [width, height])(document.querySelector('canvas[data-layer=nodes]'))")
    assert canvas == [width, height]
    places = page.evaluate("Array.from({ length: 906 }, (_, gene) => corymb.map.where(gene))")
    assert all(0 < place["x"] < width and 0 < place["y"] < height for place in places)


def test_the_picture_is_twice_the_size(page: Page) -> None:
    size = page.evaluate("""async () => {
      const picture = await createImageBitmap(await corymb.map.png());
      const map = document.getElementById("map");
      return [picture.width / map.clientWidth, picture.height / map.clientHeight];
    }""")
    assert size == [2, 2]


def test_the_map_survives_a_new_element(page: Page) -> None:
    page.evaluate("""() => {
      const old = document.getElementById("map");
      const fresh = document.createElement("div");
      fresh.id = "map";
      old.replaceWith(fresh);
      corymb.map.select({ module: 0, genes: [] });
    }""")
    stats = at_rest(page)
    assert stats["nodes"] == 906
    place = page.evaluate(ALONE)[0]
    assert page.evaluate(PIXEL, ["nodes", place["x"], place["y"]])[3] == 255


def test_the_marker_is_dragged_to_ready_points(page: Page) -> None:
    box = page.locator("#ruler svg").bounding_box()
    assert box is not None
    marker = page.locator("#ruler .ruler-marker path").bounding_box()
    assert marker is not None
    middle = marker["y"] + marker["height"] / 2
    page.mouse.move(marker["x"] + marker["width"] / 2, middle)
    page.mouse.down()
    page.mouse.move(box["x"] + box["width"] * 0.7, middle, steps=12)
    page.wait_for_timeout(60)
    assert page.evaluate("tried.heard.rests") == []
    page.mouse.up()
    moves, rests, grid = page.evaluate("[tried.heard.moves, tried.heard.rests, tried.study.ruler.grid]")
    assert len(moves) >= 3
    assert len(rests) == 1
    assert rests[0] == moves[-1]
    index, value = rests[0]
    assert value == grid[index] > 2.6
    assert float(page.get_attribute("#ruler svg", "aria-valuenow") or 0) == pytest.approx(value, rel=0.005)


def test_the_marker_follows_the_keys_and_skips_what_is_not_ready(page: Page) -> None:
    page.evaluate("""() => {
      const ruler = structuredClone(tried.study.ruler);
      for (const index of [0, 1, 20, 21, 33]) ruler.modules[index] = null;
      corymb.ruler.draw({ ...ruler, value: ruler.grid[19], busy: true });
    }""")
    page.focus("#ruler svg")
    for key, expected in (("ArrowRight", 22), ("ArrowLeft", 19), ("ArrowDown", 18), ("Home", 2), ("End", 32)):
        page.keyboard.press(key)
        page.wait_for_timeout(40)
        assert page.evaluate("tried.heard.moves.at(-1)[0]") == expected
    assert page.evaluate("tried.heard.rests") == []
    page.wait_for_timeout(300)
    assert page.evaluate("tried.heard.rests.map(([index]) => index)") == [32]
    assert "modules" in (page.get_attribute("#ruler svg", "aria-valuetext") or "")
    assert page.get_attribute("#ruler svg", "aria-busy") == "true"


def test_ruler_labels_never_overlap(page: Page) -> None:
    for width in (1366, 1100, 700):
        page.set_viewport_size({"width": width, "height": 768})
        page.wait_for_timeout(120)
        overlaps = page.evaluate("""() => {
          const boxes = Array.from(document.querySelectorAll("#ruler text"), (text) => text.getBoundingClientRect());
          const meet = (a, b) => a.left < b.right && b.left < a.right && a.top + 2 < b.bottom && b.top + 2 < a.bottom;
          return boxes.flatMap((one, i) => boxes.slice(i + 1).filter((two) => meet(one, two))).length;
        }""")
        assert overlaps == 0, width


@pytest.mark.parametrize("theme", ["light", "dark"])
@pytest.mark.parametrize("projector", ["off", "on"])
def test_text_has_contrast(page: Page, theme: str, projector: str) -> None:
    """WCAG 2.2, success criteria 1.4.3 (text 4.5 : 1) and 1.4.11 (controls 3 : 1); formula from its glossary."""
    page.evaluate(
        "([theme, projector]) => Object.assign(document.documentElement.dataset, { theme, projector })",
        [theme, projector],
    )
    text = [("ink", "paper"), ("ink", "panel"), ("ink-soft", "paper"), ("ink-soft", "panel"), ("leaf", "panel")]
    text += [("ochre", "ochre-pale"), ("ink", "ochre-pale"), ("on-leaf", "leaf"), ("leaf-deep", "leaf-pale")]
    text += [("ink", "leaf-pale"), ("ink-soft", "wash"), ("leaf", "leaf-pale")]
    parts = [("edge", "paper"), ("edge", "panel"), ("leaf", "paper"), ("ochre-bar", "panel"), ("blue", "panel")]
    for pairs, least in ((text, 4.5), (parts, 3.0)):
        for front, back in pairs:
            ratio = _contrast(_token(page, front), _token(page, back))
            assert ratio >= least, f"{front} on {back}: {ratio:.2f}"
    until(page, READY)


def _token(page: Page, name: str) -> list[int]:
    value = page.evaluate(f"getComputedStyle(document.documentElement).getPropertyValue('--{name}')").strip()
    return [int(value[place : place + 2], 16) for place in (1, 3, 5)]


def _luminance(colour: list[int]) -> float:
    shares = [part / 255 for part in colour]
    linear = [share / 12.92 if share <= 0.04045 else ((share + 0.055) / 1.055) ** 2.4 for share in shares]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def _contrast(one: list[int], two: list[int]) -> float:
    low, high = sorted((_luminance(one), _luminance(two)))
    return (high + 0.05) / (low + 0.05)


def test_a_network_that_cannot_be_fetched_is_said_on_the_map(browser: Browser, address: str) -> None:
    page = browser.new_page()
    page.goto(f"{address}?data=50")
    until(page, READY)
    refused = page.evaluate(
        "corymb.map.load({ url: '/data/none', label: '' }).then(() => '', (fault) => fault.message)"
    )
    assert "404" in refused
    message = page.locator(".map-message")
    assert message.is_visible()
    assert message.inner_text().startswith("The network could not be drawn")
    page.close()


def test_colours_for_another_network_are_refused(page: Page) -> None:
    said = page.evaluate("""() => {
      try { corymb.map.colour({ labels: new Uint16Array(3), hues: [], numbers: [], grey: null }); } catch (fault) {
        return fault.message;
      }
      return "";
    }""")
    assert "3 genes" in said
    assert "906" in said
