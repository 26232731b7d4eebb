"""Entry point: reads the arguments, calls a command, and turns what goes wrong into an exit status."""

from __future__ import annotations

import argparse
import io
import os
import sys
from collections.abc import Sequence
from contextlib import suppress
from typing import TypeAlias

from eqsheet.app import exit_status

_EPILOG = """\
examples:
  eqsheet solve penstock.eqsheet                     results in a table
  eqsheet solve penstock.eqsheet --with 'D = 60 mm'  the same with another bore, for this run only
  eqsheet solve rate.eqsheet --free D --with 'Q = 2 L/s'
  eqsheet check *.eqsheet                            verdicts only; fails outside limits and validity
  eqsheet blocks penstock.eqsheet                    in what order it is solved
  eqsheet edit penstock.eqsheet                      change lines and see what moves
  eqsheet fmt penstock.eqsheet                       tidy the text, never its meaning

exit status:
  0 solved, every limit holds      66 a file cannot be read
  1 solved, but a limit fails      70 our own mistake
  2 wrong usage                    73 output cannot be written
  3 the worksheet is not valid    130 interrupted
  4 no solution found
"""


_Commands: TypeAlias = "argparse._SubParsersAction[argparse.ArgumentParser]"


def build_parser() -> argparse.ArgumentParser:
    """The parser of the command line."""
    parser = argparse.ArgumentParser(
        prog="eqsheet",
        description="Solve plain-text worksheets of simultaneous equations with units.",
        epilog=_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="store_true", help="print the version and stop")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", title="commands")

    solve = _command(
        commands,
        "solve",
        "solve worksheets and print the results",
        "Solve each worksheet and print its quantities, limits and warnings.",
        "solve loop.eqsheet --with 'D = 60 mm' --free v",
    )
    _add_files(solve)
    _add_changes(solve)
    _add_json(solve)
    solve.add_argument("--trace", action="store_true", help="print the course of the iterations too")

    check = _command(
        commands,
        "check",
        "solve worksheets and print only the verdicts",
        "Solve each worksheet; print what is wrong with it and one line of verdict. "
        "Fails where a limit fails or a validity range is left.",
        "check *.eqsheet",
    )
    _add_files(check)
    _add_changes(check)
    _add_json(check)

    blocks = _command(
        commands,
        "blocks",
        "show the order of solution",
        "Show block by block what is solved together, by which method, and what it depends on.",
        "blocks loop.eqsheet",
    )
    _add_file(blocks)
    _add_changes(blocks)
    _add_json(blocks)

    edit = _command(
        commands,
        "edit",
        "edit a worksheet and see what each change does",
        "Edit a worksheet line by line; after each change the quantities that moved are shown.",
        "edit loop.eqsheet",
    )
    _add_file(edit)

    fmt = _command(
        commands,
        "fmt",
        "tidy the text of worksheets",
        "Rewrite each worksheet in canonical spacing; never changes its meaning. "
        "With - the tidied text goes to standard output.",
        "fmt --check *.eqsheet",
    )
    _add_files(fmt)
    fmt.add_argument("--check", action="store_true", help="change nothing; exit 1 if a file is not tidy")
    return parser


def _command(
    commands: _Commands, name: str, summary: str, description: str, example: str
) -> argparse.ArgumentParser:
    return commands.add_parser(
        name,
        help=summary,
        description=description,
        epilog=f"example: eqsheet {example}",
        allow_abbrev=False,
    )


_FILE = "worksheet, or - for standard input"


def _add_file(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help=_FILE)


def _add_files(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("files", nargs="+", metavar="FILE", help=_FILE)


def _add_json(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--json", action="store_true", help="print one JSON object a file")


def _add_changes(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--with",
        dest="changes",
        action="append",
        default=[],
        metavar="STATEMENT",
        help="for this run, replace the known of that name or add the statement",
    )
    parser.add_argument(
        "--free",
        action="append",
        default=[],
        metavar="NAME",
        help="for this run, switch the known of that name off",
    )


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line and return its exit status.

    Parameters
    ----------
    arguments : sequence of str, optional
        Without the program's name; ``sys.argv`` by default.
    """
    parser = build_parser()
    _prepare_streams()
    try:
        options = parser.parse_args(arguments)
    except SystemExit as stop:
        return int(stop.code or 0)
    if sys.stdout is None:
        print("eqsheet: output cannot be written: standard output is closed", file=sys.stderr)
        return exit_status.UNWRITABLE
    try:
        status = _run(parser, options)
        sys.stdout.flush()
        return status
    except KeyboardInterrupt:
        print("eqsheet: interrupted", file=sys.stderr)
        return exit_status.INTERRUPTED
    except BrokenPipeError:
        _let_go_of_output()
        print("eqsheet: output cannot be written: its reader has gone", file=sys.stderr)
        return exit_status.UNWRITABLE
    except OSError as trouble:
        _let_go_of_output()
        print(f"eqsheet: output cannot be written: {trouble.strerror or trouble}", file=sys.stderr)
        return exit_status.UNWRITABLE
    except Exception as mistake:
        return _own_mistake(mistake)


def _prepare_streams() -> None:
    """Make any text printable whatever the encoding, and messages harmless where standard error is closed."""
    if sys.stderr is None:
        sys.stderr = open(os.devnull, "w")  # noqa: SIM115 - stays open as long as the program runs
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")


def _let_go_of_output() -> None:
    """Keep the interpreter from complaining when it closes a standard output that takes nothing."""
    with suppress(OSError, ValueError):
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def _run(parser: argparse.ArgumentParser, options: argparse.Namespace) -> int:
    match options.command:
        case "solve":
            from eqsheet.app.command_line.solve import run_solve, run_solve_with_trace

            if options.trace and not options.json:
                return run_solve_with_trace(options.files, options.changes, options.free)
            return run_solve(options.files, options.changes, options.free, options.json)
        case "check":
            from eqsheet.app.command_line.check import run_check

            return run_check(options.files, options.changes, options.free, options.json)
        case "blocks":
            from eqsheet.app.command_line.blocks import run_blocks

            return run_blocks(options.file, options.changes, options.free, options.json)
        case "edit":
            from eqsheet.app.editor.session import run_edit

            return run_edit(options.file)
        case "fmt":
            if options.check:
                from eqsheet.app.command_line.fmt import run_fmt_check

                return run_fmt_check(options.files)
            from eqsheet.app.command_line.fmt import run_fmt

            return run_fmt(options.files)
        case _:
            if options.version:
                print(f"eqsheet {_version()}")
                return exit_status.SOLVED
            parser.print_usage(sys.stderr)
            print("eqsheet: name a command; `eqsheet --help` shows them with examples", file=sys.stderr)
            return exit_status.WRONG_USAGE


def _version() -> str:
    from importlib.metadata import PackageNotFoundError, version

    try:
        return version("eqsheet")
    except PackageNotFoundError:
        return "from a checkout, not installed"


def _own_mistake(mistake: Exception) -> int:
    """Report a bug of ours without a traceback on the screen: what, where, and a request to report it."""
    frame = mistake.__traceback__
    while frame is not None and frame.tb_next is not None:
        frame = frame.tb_next
    where = ""
    if frame is not None:
        where = f" ({os.path.basename(frame.tb_frame.f_code.co_filename)}:{frame.tb_lineno})"
    print(
        f"eqsheet: this is our own mistake, please report it with the worksheet: "
        f"{type(mistake).__name__}: {mistake}{where}",
        file=sys.stderr,
    )
    if os.environ.get("EQSHEET_TRACEBACK"):
        import traceback

        traceback.print_exception(mistake)
    return exit_status.OWN_MISTAKE
