"""The command line: ``workbench reduce``, ``open``, ``table`` and their fellows.

Exit status: 0 all well; 1 some captures failed, or a hand-off folder differs; 2 nothing could be
done.  Our own packages are imported inside the commands: help and typing errors come at once.
"""

from __future__ import annotations

import os
import signal
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from functools import wraps
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from workbench.base.errors import WorkbenchError
from workbench.write.plain import aligned, printable

if TYPE_CHECKING:
    from workbench.store.open import Store

# Before numpy is loaded: its matrices are small here, and threads would only get in each other's way
# beside several processes.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

ALL_WELL, SOME_FAILED, NOTHING_DONE = 0, 1, 2
_CATALOG = "catalog.sqlite"

app = typer.Typer(
    name="workbench",
    help="Evaluate magnetic alloys by the B-H loops of ring specimens.",
    epilog="Exit status: 0 all well; 1 some captures failed, or a hand-off differs; 2 nothing could be done.",
    no_args_is_help=True,
    add_completion=False,
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
    # Wide enough that no command's sentence is cut in the list.
    context_settings={"terminal_width": 160},
)

Folder = Annotated[Path, typer.Argument(metavar="FOLDER", help="The campaign folder, with campaign.toml and runs.csv.")]
StorePath = Annotated[Path, typer.Argument(metavar="STORE", help="A store that `workbench reduce` wrote.")]
Capture = Annotated[str, typer.Argument(metavar="CAPTURE", help="The capture as runs.csv names it.")]
Workers = Annotated[int | None, typer.Option(min=1, help="Processes to work with.", show_default="the number of cores")]


def main() -> None:
    """Run the command line; the entry point of ``workbench``."""
    for stream in (sys.stdout, sys.stderr):
        # A terminal that has no Ĥ shows \\u0124; it does not end the program.
        stream.reconfigure(errors="backslashreplace")  # type: ignore[union-attr]
    for name in ("SIGTERM", "SIGHUP"):
        number = getattr(signal, name, None)
        if number is not None and signal.getsignal(number) is signal.SIG_DFL:
            signal.signal(number, _stopped)
    app(prog_name="workbench")


def _stopped(number: int, _frame: object) -> None:
    # As an exception, so that worker processes are ended and half-written files removed.
    raise SystemExit(128 + number)


def _command(name: str) -> Callable[[Callable[..., int]], Callable[..., None]]:
    """Register a function that gives its exit status; its errors become plain sentences."""

    def register(function: Callable[..., int]) -> Callable[..., None]:
        @wraps(function)
        def guarded(*args: Any, **options: Any) -> None:
            with _plain_errors():
                status = function(*args, **options)
                sys.stdout.flush()
                raise SystemExit(status)

        app.command(name)(guarded)
        return guarded

    return register


@contextmanager
def _plain_errors() -> Iterator[None]:
    try:
        yield
    except WorkbenchError as error:
        _end(str(error), NOTHING_DONE)
    except KeyboardInterrupt:
        _end("Stopped. What was finished is kept; run the same command again to go on.", 128 + signal.SIGINT)
    except BrokenPipeError:
        # The reader, `head` for instance, has seen enough.  Python would complain at exit
        # when it flushes the rest.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        raise SystemExit(ALL_WELL) from None
    except OSError as error:
        _debug()
        _end(f"The system refused a file: {error}. Look at the path, its permissions and the space left.", NOTHING_DONE)
    except Exception as error:
        _debug()
        _end(
            f"Something unforeseen happened, which is a fault of the program: {type(error).__name__}: {error}. "
            "Please report it; with WORKBENCH_DEBUG=1 set, the same command prints the details to send along.",
            NOTHING_DONE,
        )


def _debug() -> None:
    if os.environ.get("WORKBENCH_DEBUG"):
        raise  # called inside an except clause only: the error under way, with its traceback


def _end(message: str, status: int) -> None:
    _say(message, sys.stderr)
    raise SystemExit(status)


def _say(text: str, stream: Any = None) -> None:
    print("\n".join(map(printable, text.split("\n"))), file=stream or sys.stdout, flush=True)


@_command("reduce")
def reduce_command(
    folder: Folder,
    into: Annotated[Path | None, typer.Option(metavar="STORE", show_default="FOLDER.store, beside it")] = None,
    workers: Workers = None,
) -> int:
    """Turn the captures of a campaign into loops and figures; only new or changed ones are worked on."""
    return _status(_reduced(folder, into or _beside(folder), workers))


@_command("open")
def open_command(
    path: Annotated[Path, typer.Argument(metavar="FOLDER|STORE", help="A campaign folder, or a store.")],
    workers: Workers = None,
) -> int:
    """Reduce what is new, then start JupyterLab on a notebook that shows the workbench."""
    from workbench.write.lab import serve
    from workbench.write.notebook import opening_notebook

    store = _opened(path, workers) if (path / _CATALOG).exists() else _reduced(path, _beside(path), workers)
    notebook = opening_notebook(store, Path(store.path).with_suffix(".ipynb"))
    _say(f"notebook: {_shown(notebook)}")
    serve(notebook, _say)
    return _status(store)


@_command("table")
def table_command(
    path: StorePath,
    csv: Annotated[bool, typer.Option("--csv", help="Every quantity in SI units, as CSV to standard output.")] = False,
) -> int:
    """Show the runs of a store, one row a run, values with U (k = 2)."""
    from workbench.store.open import open_store
    from workbench.write.table import table_head, table_rows, write_csv
    from workbench.write.terminal import ruled

    runs = open_store(path).runs
    if csv:
        write_csv(runs, sys.stdout)
    elif sys.stdout.isatty():
        ruled(table_head(runs), table_rows(runs))
    else:
        print("\n".join(aligned(table_head(runs), table_rows(runs))))
    return ALL_WELL


@_command("trace-back")
def trace_back_command(path: StorePath, capture: Capture) -> int:
    """Show one run's whole way from its capture to its figures, with their budgets."""
    from workbench.store.open import open_store
    from workbench.write.trace_back import trace_back

    _say(str(trace_back(open_store(path), capture)))
    return ALL_WELL


@_command("draft")
def draft_command(
    folder: Annotated[Path, typer.Argument(metavar="FOLDER", help="A folder of captures.")],
    names: Annotated[
        str,
        typer.Option(
            metavar="PATTERN",
            help='How a file is named, e.g. "{specimen}_{peak_field}_{frequency}_{temperature}".',
        ),
    ],
) -> int:
    """Write a first campaign.toml and runs.csv from file names; nothing is overwritten."""
    from workbench.capture.draft import draft_campaign

    for path in draft_campaign(folder, names):
        _say(f"wrote {_shown(path)}")
    _say(f"Fill in the sheet, look through the run list, then: workbench reduce {_shown(folder)}")
    return ALL_WELL


@_command("set-aside")
def set_aside_command(
    path: StorePath, capture: Capture, reason: Annotated[str, typer.Option(help="Why; it is kept in the history.")]
) -> int:
    """Leave a run out of cube and hand-off, with a reason; the capture itself is not touched."""
    from workbench.store.open import open_store

    if not reason.strip():
        raise WorkbenchError("Setting a run aside: wanted a reason in words; found an empty one.")
    open_store(path).set_aside(capture, reason)
    _say(f"{capture} is set aside: {reason}")
    return ALL_WELL


@_command("take-back")
def take_back_command(path: StorePath, capture: Capture) -> int:
    """Take a run back that was set aside."""
    from workbench.store.open import open_store

    open_store(path).take_back(capture)
    _say(f"{capture} is kept again")
    return ALL_WELL


@_command("handoff")
def handoff_command(
    path: StorePath,
    to: Annotated[Path, typer.Option(metavar="FOLDER", help="The new folder.")],
    specimen: Annotated[list[str] | None, typer.Option(help="Only this one; may be repeated.")] = None,
    frequency: Annotated[list[str] | None, typer.Option(help='"400 Hz" or 400; may be repeated.')] = None,
    temperature: Annotated[list[str] | None, typer.Option(help='"100 degC" or 100; may be repeated.')] = None,
    peak_field: Annotated[list[str] | None, typer.Option(help='"80 A/m" or 80; may be repeated.')] = None,
    peak_induction: Annotated[list[str] | None, typer.Option(help='"1 T" or 1; may be repeated.')] = None,
) -> int:
    """Write a folder that a colleague opens without this program: notebook, netCDF, sheet, SHA-256."""
    from workbench.store.open import open_store
    from workbench.write.choice import settings_of
    from workbench.write.handoff import hand_off

    typed = {
        "frequency": frequency,
        "temperature": temperature,
        "peak_field": peak_field,
        "peak_induction": peak_induction,
    }
    settings = {name: settings_of(name, texts) for name, texts in typed.items() if texts}
    folder = hand_off(open_store(path), to, specimen=specimen or None, **settings)
    _say(f"wrote {_shown(folder)}: {', '.join(sorted(each.name for each in folder.iterdir()))}")
    _say(f"Whoever gets it can check it: workbench verify {_shown(folder)}, or sha256sum --check SHA256SUMS")
    return ALL_WELL


@_command("verify")
def verify_command(
    folder: Annotated[Path, typer.Argument(metavar="FOLDER", help="A hand-off folder.")],
) -> int:
    """Check a hand-off folder against its list of SHA-256 and say what differs."""
    from workbench.write.verify import verify

    findings = verify(folder)
    for finding in findings:
        _say(str(finding))
    _say(f"{_shown(folder)}: {len(findings)} differ" if findings else f"{_shown(folder)}: all files as handed over")
    return SOME_FAILED if findings else ALL_WELL


def _reduced(folder: Path, into: Path, workers: int | None) -> Store:
    from workbench.capture.read import read_campaign
    from workbench.store.open import open_store
    from workbench.store.reduce import reduce
    from workbench.write.summary import summary

    campaign = read_campaign(folder)
    before = open_store(into).revision if (into / _CATALOG).exists() else None
    store = reduce(campaign, into, workers=workers or os.cpu_count() or 1, progress=sys.stderr.isatty())
    _say("\n".join(map(printable, summary(store))))
    _say(f"nothing new: {_shown(into)}" if store.revision == before else f"store: {_shown(into)}")
    return store


def _opened(path: Path, workers: int | None) -> Store:
    from workbench.store.open import open_store
    from workbench.write.summary import summary

    store = open_store(path)
    if Path(store.campaign_folder).is_dir():
        return _reduced(Path(store.campaign_folder), path, workers)
    _say(f"The campaign folder {store.campaign_folder} is not there: the store is opened as it is.")
    _say("\n".join(summary(store)))
    return store


def _status(store: Store) -> int:
    return SOME_FAILED if len(store.failures) else ALL_WELL


def _beside(folder: Path) -> Path:
    # abspath and not resolve: beside the name that was given, also where that is a link.
    where = Path(os.path.abspath(folder))
    return where.with_name(f"{where.name}.store")


def _shown(path: Path) -> str:
    absolute = Path(os.path.abspath(path))
    return str(absolute.relative_to(Path.cwd())) if absolute.is_relative_to(Path.cwd()) else str(absolute)
