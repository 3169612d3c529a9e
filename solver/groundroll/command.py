"""The command line: words only."""

import argparse
import sys
from pathlib import Path

from groundroll.errors import GroundrollError, InputError, StorageError


def main(arguments: list[str] | None = None) -> int:
    """Run one command and return its exit status: 0 done, 2 input, 3 computation, 4 storage, 130 interrupted."""
    options = parser().parse_args(arguments)
    try:
        return options.do(options) or 0
    except GroundrollError as error:
        print(f"groundroll {options.command}: {error}", file=sys.stderr)
        return error.exit_status
    except KeyboardInterrupt:
        print(f"groundroll {options.command}: interrupted", file=sys.stderr)
        return 130


def parser() -> argparse.ArgumentParser:
    """Return the parser of all commands."""
    top = argparse.ArgumentParser(prog="groundroll", description="Ground motion from point sources in near-surface ground.")
    commands = top.add_subparsers(dest="command", required=True, metavar="COMMAND")
    quiet = argparse.ArgumentParser(add_help=False)
    quiet.add_argument("-q", "--quiet", action="store_true", help="print errors only")

    new = commands.add_parser("new", parents=[quiet], help="write a commented scenario to start from")
    new.add_argument("file", type=Path, metavar="FILE")
    new.set_defaults(do=do_new)

    plan = commands.add_parser("plan", parents=[quiet], help="say mesh, steps, cost, expected error and warnings; run nothing")
    plan.add_argument("scenario", type=Path, metavar="SCENARIO")
    plan.add_argument("--threads", type=threads, metavar="N", help="threads (default: all)")
    plan.set_defaults(do=do_plan)

    run = commands.add_parser("run", parents=[quiet], help="run one scenario or several, each into its own folder")
    run.add_argument("scenarios", type=Path, nargs="+", metavar="SCENARIO")
    run.add_argument("--out", type=Path, metavar="FOLDER", help="folder of the results (default: outputs/<file stem>)")
    run.add_argument("--threads", type=threads, metavar="N", help="threads (default: all)")
    order = "marching order: steps in a pass and columns in a strip (default: from the caches); changes the speed only"
    run.add_argument("--order", type=positive, nargs=2, metavar=("STEPS", "COLUMNS"), help=order)
    run.set_defaults(do=do_run)

    draw = commands.add_parser("draw", parents=[quiet], help="draw the figures of a run")
    draw.add_argument("folder", type=Path, metavar="FOLDER")
    draw.add_argument("--only", metavar="KIND", help="record_section, peaks, wavefield or ground")
    draw.add_argument("--stretch", action="store_true", help="let the ground fill its panels instead of one scale for x and depth")
    draw.set_defaults(do=do_draw)
    return top


def threads(text: str) -> int:
    """Read a number of threads."""
    count = int(text) if text.isdigit() else 0
    if not 1 <= count <= 1024:
        raise argparse.ArgumentTypeError(f"{text!r} is not a number of threads; write a whole number from 1 to 1024, e.g. 2")
    return count


def positive(text: str) -> int:
    """Read a whole number above 0."""
    if not text.isdigit() or int(text) < 1:
        raise argparse.ArgumentTypeError(f"{text!r} is not a whole number above 0; write e.g. --order 8 2000")
    return int(text)


def say(options, text: str) -> None:
    if not options.quiet:
        print(text)


def do_new(options) -> None:
    from groundroll.scenario import template_text

    if options.file.exists():
        raise InputError(f"{options.file}: a file of this name is there already; choose another name")
    try:
        options.file.write_text(template_text(), encoding="utf-8")
    except OSError as error:
        raise StorageError(f"{options.file}: cannot be written ({error.strerror})") from error
    say(options, f"wrote {options.file}; next: groundroll plan {options.file}")


def do_plan(options) -> None:
    from groundroll import Scenario, plan

    made = plan(Scenario.load(options.scenario), options.threads)
    say(options, str(made))


def do_run(options) -> int:
    from groundroll.running.many import run_all
    from groundroll.waves.march import Order

    order = Order(*options.order) if options.order else None
    return run_all(options.scenarios, options.out, options.threads, options.quiet, order)


def do_draw(options) -> None:
    from groundroll.figures import draw

    for path in draw(options.folder, options.only, stretch=options.stretch):
        say(options, str(path))


if __name__ == "__main__":
    sys.exit(main())
