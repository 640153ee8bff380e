"""What is no store, or not ours to write into, is refused in words that say what to do."""

from __future__ import annotations

import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from workbench.base.errors import QuantityError, StoreError
from workbench.store.open import open_store


def everything(folder: Path) -> dict[str, bytes]:
    return {str(path.relative_to(folder)): path.read_bytes() for path in folder.rglob("*") if path.is_file()}


def refused(action, *words: str) -> str:
    with pytest.raises(StoreError) as caught:
        action()
    text = str(caught.value)
    for word in ("wanted", "found", *words):
        assert word in text
    return text


def test_nothing_there(tmp_path):
    refused(lambda: open_store(tmp_path / "no.store"), "nothing of this name", "Give the folder that 'reduce' wrote")


def test_a_file(tmp_path):
    (tmp_path / "x.store").write_text("hello")
    refused(lambda: open_store(tmp_path / "x.store"), "found a file")


def test_a_folder_of_other_things(tmp_path):
    (tmp_path / "notes.txt").write_text("hello")
    refused(lambda: open_store(tmp_path), "catalog.sqlite", "found none in it, so it is not a store")


def test_a_campaign_folder(tmp_path):
    (tmp_path / "campaign.toml").write_text("sheet = 1")
    refused(lambda: open_store(tmp_path), "reduce it first")


@pytest.mark.parametrize("content", [b"", b"garbage, garbage, garbage" * 100, b"\0" * 5000])
def test_a_catalog_of_garbage(tmp_path, content):
    (tmp_path / "catalog.sqlite").write_bytes(content)
    refused(lambda: open_store(tmp_path), "catalog")


def test_another_database(tmp_path):
    with closing(sqlite3.connect(tmp_path / "catalog.sqlite")) as other:
        other.execute("CREATE TABLE addresses (name TEXT)")
        other.commit()
    refused(lambda: open_store(tmp_path), "another database")


def test_a_cut_catalog(three):
    three.reduce()
    catalog = three.into / "catalog.sqlite"
    catalog.write_bytes(catalog.read_bytes()[:6000])
    refused(lambda: open_store(three.into), "damaged", "the captures are untouched")


@pytest.mark.parametrize(
    "statement",
    [
        "DELETE FROM sheets", "DELETE FROM states", "UPDATE sheets SET specimens = '{'",
        "UPDATE sheets SET specimens = 5", "UPDATE runs SET frequency = 'fifty'", "UPDATE runs SET repeat = NULL",
    ],
)  # fmt: skip
def test_a_catalog_with_unreadable_content(three, statement):
    three.reduce()
    with closing(sqlite3.connect(three.into / "catalog.sqlite")) as catalog:
        catalog.execute(statement)
        catalog.commit()
    refused(lambda: open_store(three.into), "damaged", "the captures are untouched")


@pytest.mark.parametrize("spoil", [Path.unlink, lambda catalog: catalog.write_bytes(b"")])
def test_segments_without_their_catalog_are_kept(three, spoil):
    three.reduce()
    spoil(three.into / "catalog.sqlite")
    before = everything(three.into)
    refused(three.reduce, "segments without a catalog", "Copy catalog.sqlite back")
    assert everything(three.into) == before


@pytest.mark.parametrize("statement", ["PRAGMA user_version = 2", "UPDATE meta SET value = '2' WHERE name = 'format'"])
def test_a_newer_format(three, statement):
    three.reduce()
    with closing(sqlite3.connect(three.into / "catalog.sqlite")) as catalog:
        catalog.execute(statement)
        catalog.commit()
    before = everything(three.into)
    refused(lambda: open_store(three.into), "format 1 or older", "found format 2", "Install that version")
    refused(three.reduce, "found format 2")
    assert everything(three.into) == before


def only_segment(three) -> Path:
    (segment,) = (three.into / "segments").glob("*.nc")
    return segment


def test_a_segment_gone(three):
    three.reduce()
    only_segment(three).unlink()
    refused(lambda: open_store(three.into), ".nc as it was written", "no such file")
    refused(three.reduce, "no such file")


def test_a_segment_cut(three):
    three.reduce()
    segment = only_segment(three)
    segment.write_bytes(segment.read_bytes()[:-7])
    refused(lambda: open_store(three.into), "bytes in place of")


def test_a_flipped_bit_in_a_loop_is_found(three):
    store = three.reduce()
    loop = store.runs["field"].values.tobytes()
    segment = only_segment(three)
    content = bytearray(segment.read_bytes())
    place = content.index(loop)
    content[place + 100] ^= 1
    segment.write_bytes(content)
    refused(lambda: open_store(three.into).runs, "cannot be read", "reduce the campaign into a new store")


def test_an_earlier_state_that_never_was(three):
    three.reduce()
    refused(lambda: open_store(three.into, at=7), "a state between 1 and 2; found 7")


def test_into_the_campaign_folder_itself(three):
    three.into = three.folder
    before = everything(three.folder)
    refused(three.reduce, "found the campaign folder", "ellipses.store beside it")
    assert everything(three.folder) == before


def test_into_a_folder_inside_the_campaign(three):
    three.into = three.folder / "mine.store"
    assert three.reduce().campaign_folder == three.folder.resolve()


def test_into_a_file_or_a_folder_of_other_things(three, tmp_path):
    three.into = tmp_path / "file"
    three.into.write_text("mine")
    refused(three.reduce, "found a file")
    three.into = tmp_path / "thesis"
    three.into.mkdir()
    (three.into / "chapter.txt").write_text("mine")
    refused(three.reduce, "a folder of other things", "nothing was touched")
    assert everything(three.into) == {"chapter.txt": b"mine"}


def test_into_the_store_of_another_campaign(three, tmp_path):
    three.reduce()
    three.title, three.folder = "Another", tmp_path / "another"
    for line in three.lines:
        three.write(line.capture, 5.0)
    before = everything(three.into)
    refused(three.reduce, "this campaign's own store; found that of 'Ellipses'")
    assert everything(three.into) == before


def test_renamed_or_moved_is_the_same_campaign(three, tmp_path):
    three.reduce()
    three.title = "A better title"
    assert three.reduce().title == "A better title"
    moved = three.folder.rename(tmp_path / "moved")
    three.folder = moved
    assert three.reduce().campaign_folder == moved.resolve()
    assert three.worked == []


def test_what_a_crash_left_of_a_new_store_is_no_hindrance(three):
    (three.into / "segments").mkdir(parents=True)
    (three.into / "catalog.sqlite").touch()
    (three.into / "writer.lock").touch()
    assert three.reduce().runs.sizes["run"] == 3


@pytest.mark.parametrize(
    ("by", "at", "words"),
    [
        ("induction", [1.0], "Did you mean 'induction_tip'?"),
        ("induction_tip", None, "one or more numbers above 0"),
        ("induction_tip", [], "one or more numbers above 0"),
        ("induction_tip", [0.5, -1.0], "one or more numbers above 0"),
        ("peak_field", [1.0], "only together with a tip"),
    ],
)
def test_a_cube_by_something_else(three, by, at, words):
    store = three.reduce()
    with pytest.raises(QuantityError) as caught:
        store.cube(by=by, at=at)
    assert words in str(caught.value)
