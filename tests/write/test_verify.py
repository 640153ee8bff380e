"""A hand-off folder against its list: `sha256sum` of coreutils is the outside judge of the format."""

from __future__ import annotations

import shutil
import subprocess
from collections.abc import Callable
from pathlib import Path

import pytest

from workbench.base.errors import HandoffError
from workbench.write.checksums import LIST_NAME, file_sha256, parse_list, write_list
from workbench.write.verify import verify


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    place = tmp_path / "for a colleague"
    place.mkdir()
    (place / "runs.nc").write_bytes(b"abc")
    (place / "campaign.toml").write_bytes(b"")
    write_list(place, ["runs.nc", "campaign.toml"])
    return place


def test_digest_of_a_known_message(folder: Path) -> None:
    # FIPS 180-4 example of NIST, SHA-256 of "abc".
    assert file_sha256(folder / "runs.nc") == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"


@pytest.mark.skipif(shutil.which("sha256sum") is None, reason="coreutils' sha256sum is not on this machine")
def test_the_list_is_what_sha256sum_reads(folder: Path) -> None:
    found = subprocess.run(
        ["sha256sum", "--check", "--strict", LIST_NAME], cwd=folder, capture_output=True, check=False
    )
    assert found.returncode == 0, found.stderr


def test_nothing_differs(folder: Path) -> None:
    assert verify(folder) == []


def test_checkpoints_of_jupyterlab_are_no_difference(folder: Path) -> None:
    (folder / ".ipynb_checkpoints").mkdir()
    (folder / ".ipynb_checkpoints" / "hand-off-checkpoint.ipynb").touch()
    assert verify(folder) == []


def _change(folder: Path) -> None:
    (folder / "runs.nc").write_bytes(b"abd")


def _remove(folder: Path) -> None:
    (folder / "runs.nc").unlink()


def _link(folder: Path) -> None:
    shutil.move(folder / "runs.nc", folder.parent / "elsewhere.nc")
    (folder / "runs.nc").symlink_to(folder.parent / "elsewhere.nc")


def _add(folder: Path) -> None:
    (folder / "sub").mkdir()
    (folder / "sub" / "more.txt").touch()


def _add_link(folder: Path) -> None:
    (folder / "sub").symlink_to(folder.parent)


@pytest.mark.parametrize(
    ("act", "where", "found"),
    [
        (_change, "runs.nc", "a52d159f262b2c6ddb724a61840befc36eb30c88877a4030b65cbe86298449c9"),
        (_remove, "runs.nc", "no file"),
        (_link, "runs.nc", "something else of that name"),
        (_add, "sub/more.txt", "a file that was not handed over"),
        (_add_link, "sub", "a file that was not handed over"),
    ],
)
def test_what_differs_is_named(folder: Path, act: Callable[[Path], None], where: str, found: str) -> None:
    act(folder)
    (finding,) = verify(folder)
    assert (finding.where, finding.found) == (where, found)


@pytest.mark.parametrize(
    ("lines", "words"),
    [
        ("", "an empty list"),
        ("abc  runs.nc\n", "64 hexadecimal digits"),
        (f"{'0' * 64}  ../secret\n", "a file inside the folder"),
        (f"{'0' * 64}  /etc/passwd\n", "a file inside the folder"),
        (f"{'0' * 64}  ..\\secret\n", "a file inside the folder"),
        (f"{'0' * 64}  C:\\secret\n", "a file inside the folder"),
        (f"{'0' * 64}  a\n{'0' * 64}  a\n", "each file once"),
    ],
)
def test_a_damaged_list_is_refused(lines: str, words: str) -> None:
    with pytest.raises(HandoffError, match=words):
        parse_list(lines)


def test_a_folder_without_a_list_is_no_handoff(tmp_path: Path) -> None:
    with pytest.raises(HandoffError, match="found none"):
        verify(tmp_path)
    with pytest.raises(HandoffError, match="nothing of that name"):
        verify(tmp_path / "nowhere")
    (tmp_path / "note.txt").touch()
    with pytest.raises(HandoffError, match="found a file"):
        verify(tmp_path / "note.txt")


def test_a_list_of_other_bytes_is_refused(folder: Path) -> None:
    (folder / LIST_NAME).write_bytes(b"\xff\xfe\x00")
    with pytest.raises(HandoffError, match="cannot be read"):
        verify(folder)
