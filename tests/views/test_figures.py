import base64
import re
import xml.etree.ElementTree as ElementTree
from dataclasses import replace

from closed_form_store import HOSTILE, closed_form_store

from workbench.views.derived.index import run_index
from workbench.views.derived.overview import overview
from workbench.views.derived.page import page
from workbench.views.derived.settle import start
from workbench.views.figures import fallback, picture
from workbench.views.selection import Selection


def test_the_picture_is_well_formed_and_the_same_each_time():
    store = closed_form_store()
    first = picture(store)
    ElementTree.fromstring(first)
    assert first == picture(store)


def test_the_picture_follows_the_selection():
    store = closed_form_store()
    choice = start(run_index(store))
    assert picture(store) == picture(store, choice)
    other = Selection.from_dict({**Selection().to_dict(), "specimens": ["R52a"], "front": "R52a"})
    assert "R52a" in picture(store, other)


def test_hostile_names_are_letters_in_picture_and_page():
    store = closed_form_store()
    index = run_index(store)
    choice = replace(start(index), front=HOSTILE)
    html = fallback(page(index, choice), overview(store, index))
    assert "<img src=x" not in html
    assert "&lt;img src=x onerror=" in html
    code = re.search(r"base64,([^\"]+)", html)[1]
    drawn = base64.b64decode(code).decode()
    assert "<img" not in drawn
    assert "&lt;img src=x" in drawn
    assert "$x_1$" in drawn, "a name is no formula"


def test_nothing_to_show_is_a_picture_too():
    store = closed_form_store(("R41a",))
    store.runs["kind"].values[:] = "initial"
    ElementTree.fromstring(picture(store))
