"""The commands; each one's own code is imported when it runs.

Results go to standard output, messages to standard error. Exit codes: 0 done; 1 the answer is no; 2 wrong use or
unreadable input.
"""

import argparse
import os
import sys
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import contextmanager, suppress
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, TextIO

from airfield_board import ADVISES, __version__
from airfield_board.errors import UserError, reason_of

if TYPE_CHECKING:
    from airfield_board.session.replaying import Replay

DONE, NO, WRONG_USE = 0, 1, 2
_PNG = b"\x89PNG\r\n\x1a\n"
"""How every PNG file begins (ISO/IEC 15948, 5.2)."""


def main(arguments: Sequence[str] | None = None) -> int:
    """Run a command.

    Parameters
    ----------
    arguments
        Without the program's name; None: those of the process.

    Returns
    -------
    int
        The exit code.
    """
    parser = _parser()
    options = parser.parse_args(arguments)
    run: Callable[[argparse.Namespace], int] = options.run
    try:
        return run(options)
    except UserError as error:
        sys.stderr.write(f"{error}\n")
        return WRONG_USE
    except BrokenPipeError:
        # Whoever read the output has had enough.
        return DONE
    except KeyboardInterrupt:
        sys.stderr.write("Stopped.\n")
        return WRONG_USE


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="airfield-board",
        description="Which types may depart now, by density altitude. Without a command it opens the window.",
        epilog=ADVISES,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"Airfield Board {__version__}")
    source = parser.add_mutually_exclusive_group()
    source.add_argument(
        "--airfield",
        type=Path,
        metavar="PROFILE",
        help="open the window on this airfield profile (default: the last one, or the set-up of a first one)",
    )
    source.add_argument("--demo", action="store_true", help="open the demo: an invented field that feeds itself")
    parser.add_argument("--wall", action="store_true", help="open with the wall view, on the whole screen")
    parser.add_argument("--scheme", choices=("light", "dark", "system"), default="system", help="colours of the window")
    parser.set_defaults(run=_window)
    commands = parser.add_subparsers(title="commands", metavar="COMMAND")
    _add_assess(commands)
    _add_compute(commands)
    _add_replay(commands)
    _add_check(commands)
    _add_snapshot(commands)
    _add_verify(commands)
    _add_schema(commands)
    return parser


def _command(
    commands: "argparse._SubParsersAction[argparse.ArgumentParser]",
    name: str,
    run: Callable[[argparse.Namespace], int],
    tells: str,
) -> argparse.ArgumentParser:
    parser = commands.add_parser(name, help=tells, description=tells, epilog=ADVISES, allow_abbrev=False)
    parser.set_defaults(run=run)
    return parser


def _airfield_option(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--airfield", type=Path, metavar="PROFILE", required=True, help="the airfield profile")


def _time(text: str) -> datetime:
    expected = f"{text!r} is no time with an offset, such as 2026-07-14T20:05:00Z"
    try:
        when = datetime.fromisoformat(text)
    except ValueError as error:
        raise argparse.ArgumentTypeError(expected) from error
    if when.tzinfo is None:
        raise argparse.ArgumentTypeError(expected)
    return when.astimezone(UTC)


# -- the window


def _window(options: argparse.Namespace) -> int:
    if options.demo:
        from airfield_board.window.application import run_demo

        return run_demo(scheme=options.scheme, wall=options.wall)
    from airfield_board.window.application import run_window

    return run_window(options.airfield, scheme=options.scheme, wall=options.wall)


# -- assess


def _add_assess(commands: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    parser = _command(
        commands, "assess", _assess, "the board once, as a table or JSON, from the observation file alone"
    )
    _airfield_option(parser)
    parser.add_argument("--observations", type=Path, metavar="FILE", help="instead of the profile's file")
    parser.add_argument("--at", type=_time, metavar="TIME", help="from the rows up to this time (default now)")
    parser.add_argument("--json", action="store_true", help="JSON instead of a table")


def _assess(options: argparse.Namespace) -> int:
    from airfield_board.configuration.profile import load_airfield
    from airfield_board.session.board_state import Mode
    from airfield_board.session.records import empty_table
    from airfield_board.session.whole_files import assess, read_for

    profile, fleet = load_airfield(options.airfield)
    path: Path = options.observations or profile.observations.file
    trouble: UserError | None = None
    try:
        read = read_for(profile, path, finished=False)
        table = read.table
        _say(f"{path}: {note}" for note in read.notes)
    except UserError as error:
        # The board is given all the same: without observations every state is NO DATA.
        trouble, table = error, empty_table()
    at = options.at or datetime.now(UTC)
    state = assess(profile, fleet, table, at, Mode.LIVE if options.at is None else Mode.PAST)
    if options.json:
        from airfield_board.session.board_json import board_json

        _print(_json_line(board_json(state), indent=2))
    else:
        from airfield_board.window.text_board import text_board

        _print(text_board(state))
    if trouble is not None:
        _say([str(trouble)])
        return WRONG_USE
    return DONE


# -- compute


def _add_compute(commands: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    parser = _command(commands, "compute", _compute, "the air of every row of an observation file, as CSV")
    parser.add_argument("file", type=Path, metavar="FILE", help="observations: CSV, JSON or METAR")
    parser.add_argument("--elevation-ft", type=float, metavar="N", help="of the field; default: each row's own")
    parser.add_argument("--station", default="", metavar="ID", help="METAR: take this station's reports only")
    parser.add_argument("--out", type=Path, metavar="FILE", help="default: standard output")


def _compute(options: argparse.Namespace) -> int:
    from airfield_board.clock import us_from_time
    from airfield_board.configuration.defaults import is_elevation_ft
    from airfield_board.session.computing import compute, write_csv
    from airfield_board.session.whole_files import read_file
    from airfield_board.units import m_from_ft

    elevation_m = None
    if options.elevation_ft is not None:
        if not is_elevation_ft(options.elevation_ft):
            raise UserError(f"--elevation-ft {options.elevation_ft:g}: no elevation of an airfield")
        elevation_m = m_from_ft(options.elevation_ft)
    read = read_file(options.file, time_zone="UTC", station=options.station, finished=True)
    if options.out is not None:
        _require_not_observations(options.out, options.file)
    _say(f"{options.file}: {note}" for note in read.notes)
    computed = compute(read, elevation_m, us_from_time(datetime.now(UTC)))
    progress = _progress("rows written", len(computed.table))
    if options.out is None:
        with _output() as out:
            write_csv(computed, out, progress)
    else:
        _write_file(options.out, lambda out: write_csv(computed, out, progress))
    return DONE


def _require_not_observations(out: Path, observations: Path) -> None:
    same = out.resolve() == observations.resolve()
    if same or (out.exists() and observations.exists() and out.samefile(observations)):
        raise UserError(f"{out}: these are the observations themselves; they are never written to")


def _write_file(path: Path, write: Callable[[TextIO], None]) -> None:
    try:
        with path.open("w", encoding="utf-8", newline="") as out:
            write(out)
    except OSError as error:
        raise UserError(f"{path}: {reason_of(error)}") from error


# -- replay


def _add_replay(commands: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    parser = _command(
        commands, "replay", _replay, "recorded observations through checks, rules and episodes as if live"
    )
    parser.add_argument("file", type=Path, metavar="FILE", help="observations: CSV, JSON or METAR")
    _airfield_option(parser)
    parser.add_argument("--history", type=Path, metavar="DB", help="also record it into this new history")
    parser.add_argument("--json", action="store_true", help="one JSON object a line instead of text")


def _replay(options: argparse.Namespace) -> int:
    from airfield_board.configuration.profile import load_airfield
    from airfield_board.session.replaying import replay
    from airfield_board.session.whole_files import read_for

    profile, fleet = load_airfield(options.airfield)
    read = read_for(profile, options.file, finished=True)
    _say(f"{options.file}: {note}" for note in read.notes)
    now = datetime.now(UTC)
    if options.history is not None and options.history.exists():
        raise UserError(f"{options.history} exists; a replay records into a new history only")
    progress = _progress("rows judged", len(read.table))
    outcome = replay(profile, fleet, read, now, history_path=options.history, progress=progress)
    _say_unused(options.file, outcome)
    if options.json:
        from airfield_board.session.board_json import change_json, episode_json

        lines = [*map(change_json, outcome.changes), *map(episode_json, outcome.episodes), outcome.summary()]
        _print("".join(map(_json_line, lines)))
    else:
        from airfield_board.window.text_board import text_replay

        _print(text_replay(outcome, profile, fleet))
    return DONE


def _say_unused(path: Path, outcome: "Replay") -> None:
    from airfield_board.clock import iso_utc
    from airfield_board.observations.observation import Verdict

    for when, why in outcome.unused:
        _say([f"{path}: row of {'no readable time' if when is None else iso_utc(when)}: {why}"])
    more = outcome.rows - outcome.counts[Verdict.VALID] - len(outcome.unused)
    if more:
        _say([f"{path}: and {more:,} more rows not used; airfield-board compute gives the reason of each"])


# -- check, schema


def _add_check(commands: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    parser = _command(commands, "check", _check, "validates airfield profiles and fleets")
    parser.add_argument("files", type=Path, nargs="+", metavar="FILE", help="a profile or a fleet")


def _check(options: argparse.Namespace) -> int:
    from airfield_board.configuration.checking import check_files

    findings = check_files(options.files)
    _print("".join(f"{line}\n" for line in findings.lines))
    if findings.unreadable:
        return WRONG_USE
    return NO if findings.faults else DONE


def _add_schema(commands: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    parser = _command(commands, "schema", _schema, "prints the JSON Schema of a file")
    parser.add_argument("of", choices=("profile", "fleet"), metavar="profile|fleet")


def _schema(options: argparse.Namespace) -> int:
    from airfield_board.configuration.json_schema import fleet_schema, profile_schema

    _print(_json_line(profile_schema() if options.of == "profile" else fleet_schema(), indent=2))
    return DONE


# -- snapshot


def _size(text: str) -> tuple[int, int]:
    width, cross, height = text.partition("x")
    if not (cross and width.isascii() and width.isdigit() and height.isascii() and height.isdigit()):
        raise argparse.ArgumentTypeError(f"{text!r} is no size, such as 1440x900")
    size = int(width), int(height)
    if not (1200 <= size[0] <= 7680 and 760 <= size[1] <= 4320):
        raise argparse.ArgumentTypeError("the size must be from 1200x760 to 7680x4320")
    return size


def _add_snapshot(commands: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    parser = _command(commands, "snapshot", _snapshot, "paints a page to a PNG, without a screen")
    _airfield_option(parser)
    parser.add_argument("--out", type=Path, metavar="PNG", required=True, help="the picture")
    parser.add_argument("--page", choices=("board", "margin"), default="board")
    parser.add_argument("--size", type=_size, metavar="WxH", default=(1440, 900), help="in pixels (default 1440x900)")
    parser.add_argument("--at", type=_time, metavar="TIME", help="from the rows up to this time (default now)")
    parser.add_argument("--scheme", choices=("light", "dark"), default="light")


def _snapshot(options: argparse.Namespace) -> int:
    from airfield_board.configuration.profile import load_airfield
    from airfield_board.session.snapshot import snapshot_state
    from airfield_board.window.preflight import require_libraries

    profile, _ = load_airfield(options.airfield)
    _require_not_observations(options.out, profile.observations.file)
    _require_free_or_png(options.out)
    state, notes = snapshot_state(options.airfield, options.at, datetime.now(UTC))
    _say(notes)
    require_libraries("offscreen")
    os.environ["QT_QPA_PLATFORM"] = "offscreen"
    from airfield_board.window.board_view import PageName
    from airfield_board.window.picture import offscreen_application, save_page

    application = offscreen_application()
    page = PageName.BOARD if options.page == "board" else PageName.MARGIN
    try:
        save_page(options.out, state, state.assessed_at, page=page, size_px=options.size, scheme=options.scheme)
    except OSError as error:
        raise UserError(f"{options.out}: {reason_of(error)}") from error
    application.processEvents()
    return DONE


def _require_free_or_png(path: Path) -> None:
    """Refuse to paint over a file that is no picture: it could be the settings or another record."""
    try:
        with path.open("rb") as file:
            begins = file.read(len(_PNG))
    except OSError:
        # Whether it can be written shows when it is.
        return
    if begins not in (b"", _PNG):
        raise UserError(f"{path}: this file is no PNG picture; name another, or one that does not exist yet")


# -- verify


def _add_verify(commands: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    parser = _command(commands, "verify", _verify, "proves a history whole and unaltered")
    parser.add_argument("history", type=Path, metavar="DB")
    parser.add_argument("--closing-hash", metavar="HASH", help="a hash printed or kept elsewhere; it must occur")
    parser.add_argument("--rejudge", action="store_true", help="judge every logged observation anew and compare")


def _verify(options: argparse.Namespace) -> int:
    from airfield_board.session.verifying import verify_history

    findings = verify_history(
        options.history,
        closing_hash=options.closing_hash,
        rejudge=options.rejudge,
        progress=_progress("records checked", None),
    )
    _print("".join(f"{line}\n" for line in findings.lines))
    return DONE if findings.whole else NO


# -- what they share


def _say(lines: Iterable[str]) -> None:
    for line in lines:
        sys.stderr.write(f"{line}\n")


def _json_line(value: object, indent: int | None = None) -> str:
    import json

    return json.dumps(value, ensure_ascii=False, allow_nan=False, indent=indent) + "\n"


def _print(text: str) -> None:
    with _output() as out:
        out.write(text)


@contextmanager
def _output() -> Iterator[TextIO]:
    """Give standard output, and see that it takes everything: a full disk must not pass for a result."""
    if sys.stdout is None:
        raise UserError("There is no standard output to write to.")
    try:
        yield sys.stdout
        sys.stdout.flush()
    except OSError as error:
        # What Python still holds for it must not be written, and fail again, at the end.
        with suppress(OSError):
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        if isinstance(error, BrokenPipeError):
            raise
        raise UserError(f"The output cannot be written: {reason_of(error)}") from error


def _progress(words: str, of: int | None) -> Callable[[int], None] | None:
    """Return something that shows progress on a terminal, on one line; nothing where standard error is none."""
    if not sys.stderr.isatty():
        return None

    def show(done: int) -> None:
        whole = "" if of is None else f" of {of:,}"
        end = "\n" if done == of else ""
        sys.stderr.write(f"\r{done:,}{whole} {words}{end}")
        sys.stderr.flush()

    return show
