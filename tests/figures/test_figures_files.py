"""Pages as files, read by libraries that did not write them."""

from __future__ import annotations

import io
import json
import xml.etree.ElementTree as ET

import numpy as np
import pypdf
import pypdfium2
import pytest
from PIL import Image

from phasebrush.errors import InputError, JobStopped
from phasebrush.figures.save import page_bytes, save_page
from phasebrush.model.pages import Page

PAGE = Page(panels=("average", "locking-map", "stack", "power-map"), dpi=100)
RECIPE = {"versions": {"phasebrush": "0"}, "recording_sha256": "0" * 64, "settings": {"µ": "=1+1"}}
SVG = "{http://www.w3.org/2000/svg}"
DC = "{http://purl.org/dc/elements/1.1/}"


@pytest.fixture(scope="module")
def folder(snapshot, tmp_path_factory):
    place = tmp_path_factory.mktemp("pages")
    for kind in ("png", "svg", "pdf"):
        save_page(snapshot, PAGE, place / f"page.{kind}", recipe=RECIPE)
    return place


def test_a_png_has_its_size_and_its_recipe(folder):
    with Image.open(folder / "page.png") as picture:
        assert picture.size == (1333, 750)
        assert picture.info["dpi"] == pytest.approx((100, 100), abs=0.1)
        assert json.loads(picture.text["Phasebrush-Recipe"]) == RECIPE
        pixels = np.asarray(picture.convert("RGB"))
    assert tuple(pixels[0, 0]) == (255, 255, 255)  # the panel colour of the light look
    assert len(np.unique(pixels.reshape(-1, 3), axis=0)) > 200


def test_an_svg_keeps_words_as_words(folder):
    root = ET.parse(folder / "page.svg").getroot()
    words = [" ".join("".join(x.itertext()).split()) for x in root.iter(f"{SVG}text")]
    assert "time from event (s)" in words
    assert "ITC" in words
    assert any("not for diagnosis" in text for text in words)
    assert json.loads(root.find(f".//{DC}description").text) == RECIPE
    assert root.find(f".//{DC}date") is None
    assert len(list(root.iter(f"{SVG}image"))) >= 3  # stack, maps and bars are pixels inside


def test_an_svg_reaches_for_nothing_outside(folder):
    root = ET.parse(folder / "page.svg").getroot()
    for element in root.iter():
        for name, value in element.attrib.items():
            if name.endswith("href"):
                assert value.startswith(("#", "data:")), value[:40]


def test_a_pdf_holds_words_fonts_pictures_and_the_recipe(folder):
    reader = pypdf.PdfReader(folder / "page.pdf")
    (page,) = reader.pages
    assert [float(x) for x in page.mediabox[2:]] == pytest.approx([13.333 * 72, 540], abs=0.1)
    words = " ".join(page.extract_text().split())
    assert "time from event (s)" in words
    assert "Research use only; not for diagnosis or patient care." in words
    assert json.loads(reader.metadata["/Keywords"]) == RECIPE
    assert "/CreationDate" not in reader.metadata
    assert len(page.images) >= 3
    fonts = page["/Resources"]["/Font"].get_object()
    assert fonts
    for font in fonts.values():
        inner = font.get_object()
        inner = inner["/DescendantFonts"][0].get_object() if "/DescendantFonts" in inner else inner
        assert "/FontFile2" in inner["/FontDescriptor"].get_object()  # embedded TrueType


def test_the_map_in_a_pdf_has_the_colours_of_the_map(folder, snapshot):
    """The picture inside, decoded by the other library, against numbers and colour table."""
    from phasebrush.look.colour_maps import ink
    from phasebrush.look.tokens import LIGHT

    reader = pypdf.PdfReader(folder / "page.pdf")
    shape = snapshot.maps.locking.shape
    pictures = [
        np.asarray(Image.open(io.BytesIO(x.data)).convert("RGB")) for x in reader.pages[0].images
    ]
    table = ink(LIGHT).astype(int)
    share = np.clip(snapshot.maps.locking / snapshot.maps.locking_limit, 0, 1)
    expected = table[np.minimum((share * 256).astype(int), 255)]
    best = min(_difference(picture, expected) for picture in pictures)
    assert best < 1.0, f"no picture like the map of {shape}"


def _difference(picture: np.ndarray, expected: np.ndarray) -> float:
    """Mean difference of colours at the centres of the map's cells, whichever end is up."""
    rows = ((np.arange(expected.shape[0]) + 0.5) / expected.shape[0] * picture.shape[0]).astype(int)
    columns = (np.arange(expected.shape[1]) + 0.5) / expected.shape[1] * picture.shape[1]
    at_centres = picture[rows][:, columns.astype(int)].astype(int)
    return min(float(np.abs(one - expected).mean()) for one in (at_centres, at_centres[::-1]))


def test_a_pdf_looks_like_the_png(folder):
    """Drawn by another library (PDFium): the same picture but for the smoothing of edges."""
    document = pypdfium2.PdfDocument(folder / "page.pdf")
    drawn = document[0].render(scale=100 / 72).to_pil().convert("L")
    document.close()
    with Image.open(folder / "page.png") as picture:
        ours = picture.convert("L")
    size = (334, 188)
    one, other = (np.asarray(x.resize(size, Image.Resampling.BOX), float) for x in (drawn, ours))
    assert np.abs(one - other).mean() < 3.0
    assert np.corrcoef(one.ravel(), other.ravel())[0, 1] > 0.97


@pytest.mark.parametrize("kind", [".png", ".svg", ".pdf"])
def test_the_same_page_is_the_same_file(snapshot, kind):
    page = Page(panels=("average", "dial"), columns=2, dpi=60)
    first = page_bytes(snapshot, page, kind, recipe=RECIPE)
    assert page_bytes(snapshot, page, kind, recipe=RECIPE) == first


def test_what_a_person_set_for_the_library_changes_nothing(snapshot):
    import matplotlib as mpl

    page = Page(panels=("average",), columns=1, dpi=60)
    first = page_bytes(snapshot, page, ".png")
    with mpl.rc_context({"font.size": 30, "lines.linewidth": 9, "axes.grid": True}):
        assert page_bytes(snapshot, page, ".png") == first
        assert mpl.rcParams["font.size"] == 30  # and is left as it was


def test_a_stop_leaves_what_was_there(snapshot, tmp_path):
    target = tmp_path / "page.png"
    target.write_bytes(b"before")
    for stop_at in (1, 5):  # before the first panel; before the swap
        asked = []

        def stopped(asked=asked, stop_at=stop_at) -> bool:
            asked.append(1)
            return len(asked) >= stop_at

        with pytest.raises(JobStopped):
            save_page(snapshot, Page(dpi=50), target, stopped=stopped)
    assert target.read_bytes() == b"before"
    assert list(tmp_path.iterdir()) == [target]


def test_other_endings_and_lost_folders_are_refused(snapshot, tmp_path):
    with pytest.raises(InputError, match=r"\.tiff is not known; name it \.png"):
        save_page(snapshot, PAGE, tmp_path / "page.tiff")
    with pytest.raises(InputError, match="could not be written"):
        save_page(snapshot, PAGE, tmp_path / "lost" / "page.png")
    assert list(tmp_path.iterdir()) == []
