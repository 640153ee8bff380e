"""A store and its campaign: made for it, known as its own, told when sheet or run list have changed."""

from __future__ import annotations

from pathlib import Path

from workbench.base.errors import StoreError
from workbench.capture.campaign import Campaign
from workbench.store.catalog import NAME, WRITE_SECONDS, connected, is_blank, make_tables, transaction
from workbench.store.fingerprint import program_version
from workbench.store.open import Store
from workbench.store.segments import FOLDER
from workbench.store.snapshot import facts_to_json, kept_folder
from workbench.store.writer import LOCK, Description, Writer, next_state

# What a crash in the making of a store may leave in its folder.
_OURS = {NAME, f"{NAME}-journal", LOCK, f"{LOCK}-journal", FOLDER}


def prepare_store(store: Path, campaign: Campaign) -> None:
    """Make the store of a campaign, or insist that the one which is there is the campaign's.

    Raises
    ------
    StoreError    `store` is the campaign folder, a file, a folder of other things, no sound store, one
                  without its catalog, or another campaign's: neither its title nor its folder is this one's
    """
    doing = f"Reducing '{campaign.title}' into {store}"
    if store.resolve() == campaign.folder.resolve():
        raise StoreError(
            f"{doing}: wanted a folder of its own for the store; found the campaign folder. "
            f"Choose another, e.g. {store.name}.store beside it."
        )
    if store.exists() and not store.is_dir():
        raise StoreError(f"{doing}: wanted a folder, new or a store's; found a file. Choose another name.")
    names = {path.name for path in store.iterdir()} if store.is_dir() else set()
    if NAME in names and not _is_blank(store):
        _insist_on_same(store, campaign, doing)
    elif names - _OURS:
        raise StoreError(
            f"{doing}: wanted a new folder, an empty one or a store; found a folder of other things. "
            "Choose another name; nothing was touched."
        )
    elif any((store / FOLDER).glob("*.nc")) and (not (store / NAME).exists() or _is_blank(store)):
        # No crash leaves these: the catalog comes first.  A new one would have them swept.
        raise StoreError(
            f"{doing}: wanted a store with its {NAME}, or a new folder; found segments without a catalog that names "
            f"them. Copy {NAME} back from where you keep copies, or choose another name; nothing was touched."
        )
    else:
        _create(store, campaign, doing)


def _is_blank(store: Path) -> bool:
    with connected(store) as connection:
        return is_blank(connection)


def _insist_on_same(store: Path, campaign: Campaign, doing: str) -> None:
    there = Store(store)
    if there.title != campaign.title and there.campaign_folder.resolve() != campaign.folder.resolve():
        raise StoreError(
            f"{doing}: wanted this campaign's own store; found that of '{there.title}' in {there.campaign_folder}. "
            "Choose another store. If the campaign was both moved and renamed, give it its old title once."
        )


def _create(store: Path, campaign: Campaign, doing: str) -> None:
    try:
        store.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise StoreError(
            f"{doing}: wanted a folder where you may write; found {error.strerror or error}. Choose another place."
        ) from error
    with connected(store, WRITE_SECONDS, create=True) as connection, transaction(connection, "IMMEDIATE"):
        # Another process may have been faster: then the store is there, and its lock decides.
        if is_blank(connection):
            make_tables(connection, program_version())
            change = next_state(connection)
            change.describe(describe(store, campaign))
            change.note("made", "", f"store of the campaign '{campaign.title}'")


def describe(store: Path, campaign: Campaign) -> Description:
    """What a store keeps of its campaign's sheet."""
    return Description(
        title=campaign.title,
        folder=kept_folder(store, campaign.folder),
        sheet_text=campaign.sheet_text,
        specimens=facts_to_json(campaign.specimens),
    )


def update_campaign(writer: Writer, campaign: Campaign) -> None:
    """Take over a changed sheet, and retire the runs whose line is gone from the run list."""
    description = describe(writer.store, campaign)
    listed = {line.capture for line in campaign.runs}
    gone = [capture for capture, *_ in writer.live_runs() if capture not in listed]
    gone_failures = [capture for capture, *_ in writer.live_failures() if capture not in listed]
    changed = description != writer.description()
    if not (changed or gone or gone_failures):
        return
    with writer.change() as change:
        if changed:
            change.describe(description)
            change.note("sheet changed", "", "the campaign's sheet or its place has changed")
        for capture in gone:
            change.retire(capture)
            change.note("retired", capture, "its line is gone from the run list")
        change.end_failures(gone_failures)
        for capture in gone_failures:
            change.note("retired", capture, "a failed capture whose line is gone from the run list")
