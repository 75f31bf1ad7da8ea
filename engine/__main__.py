"""Commands without a screen: `python -m engine COMMAND …`, or `lodestead-batch`.

Exit codes: 0 done (for `assess`: every comparison of the counted load cases is
`below`; for `validate`: every check agrees); 1 a comparison is above, or a check does
not agree; 3 otherwise; 2 it could not be done.
"""

from __future__ import annotations

import argparse
import io
import json
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from engine import units
from engine.circuits import LoadCase
from engine.commands import assessed, points
from engine.commands.terminal import complain, progress_line
from engine.errors import UserError
from engine.exchange.schedule import read_schedule
from engine.faults import faults
from engine.layout import Layout
from engine.layout_file import read, write
from engine.variants import layout_of

DONE, DISAGREES, COULD_NOT = 0, 1, 2


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command; its exit code."""
    if isinstance(sys.stdout, io.TextIOWrapper):
        # µ and ± must not depend on the terminal's locale.
        sys.stdout.reconfigure(encoding="utf-8")
    if isinstance(sys.stderr, io.TextIOWrapper):
        sys.stderr.reconfigure(encoding="utf-8")
    parser = _parser()
    try:
        asked = parser.parse_args(arguments)
    except SystemExit as stop:
        return stop.code if isinstance(stop.code, int) else COULD_NOT
    try:
        code: int = asked.run(asked)
        return code
    except UserError as error:
        complain(str(error))
        return COULD_NOT
    except KeyboardInterrupt:
        complain("Stopped; nothing was written.")
        return COULD_NOT
    except BrokenPipeError:
        sys.stderr.close()
        return COULD_NOT


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="lodestead-batch",
        description="Magnetic fields of electrical rooms without a screen. Values are "
        "calculated from entered data; local regulation and licensed practice decide.",
    )
    commands = parser.add_subparsers(required=True, metavar="COMMAND")

    _add_assess(commands)

    compare = commands.add_parser(
        "compare", help="set the base and its variants side by side"
    )
    compare.add_argument("layout", metavar="LAYOUT")
    _add_unit(compare)
    compare.add_argument("--json", action="store_true", help="print JSON, in tesla")
    compare.set_defaults(run=_compare)

    _add_documents(commands)

    plane = commands.add_parser("map", help="write the field on a horizontal plane")
    plane.add_argument("layout", metavar="LAYOUT")
    plane.add_argument("out", metavar="OUT.png|.svg|.csv", type=Path)
    plane.add_argument(
        "--height", type=float, required=True, metavar="H", help="above the datum [m]"
    )
    plane.add_argument("--case", metavar="NAME", help="instead of the first load case")
    _add_unit(plane)
    plane.add_argument("--json", action="store_true", help="print what was written")
    plane.set_defaults(run=_map)

    field = commands.add_parser("field", help="print the field at points")
    field.add_argument("source", metavar="SOURCE", help="a layout, or a schedule CSV")
    field.add_argument(
        "--at", action="append", required=True, metavar="X,Y,Z", help="a point [m]"
    )
    field.add_argument("--case", metavar="NAME", help="instead of the first load case")
    _add_unit(field)
    field.add_argument("--json", action="store_true", help="print JSON, in tesla")
    field.set_defaults(run=_field)

    schedule = commands.add_parser("schedule", help="turn a schedule into a layout")
    schedule.add_argument("csv", metavar="CSV", type=Path)
    schedule.add_argument("out", metavar="OUT.json", type=Path)
    schedule.add_argument("--json", action="store_true", help="print what was written")
    schedule.set_defaults(run=_schedule)

    validate = commands.add_parser(
        "validate", help="run the outside checks of the program"
    )
    validate.add_argument("--json", action="store_true", help="print JSON")
    validate.set_defaults(run=_validate)
    return parser


def _add_assess(commands: Any) -> None:
    assess = commands.add_parser(
        "assess", help="compare zones and receptors with their reference levels"
    )
    assess.add_argument("layout", metavar="LAYOUT")
    assess.add_argument("--case", metavar="NAME", help="only this load case")
    assess.add_argument("--variant", metavar="NAME", help="instead of the base")
    assess.add_argument(
        "--certify", action="store_true", help="prove upper bounds of zones' maxima"
    )
    assess.add_argument(
        "--tolerance",
        type=_share,
        default=_share("1%"),
        metavar="1%",
        help="by how much a proven bound may exceed the value found",
    )
    _add_unit(assess)
    assess.add_argument("--json", action="store_true", help="print JSON, in tesla")
    assess.add_argument(
        "--tables",
        type=Path,
        metavar="OUT.xlsx|FOLDER",
        help="write the report's tables as a workbook, or as CSV files",
    )
    assess.set_defaults(run=_assess)


def _add_documents(commands: Any) -> None:
    report = commands.add_parser("report", help="write the report as PDF")
    report.add_argument("layout", metavar="LAYOUT")
    report.add_argument("out", metavar="OUT.pdf", type=Path)
    report.add_argument(
        "--note", action="store_true", help="a note of one to two pages instead"
    )
    report.add_argument(
        "--without-checks",
        action="store_true",
        help="do not run the outside checks of the program; their section says so",
    )
    report.add_argument("--variant", metavar="NAME", help="instead of the base")
    report.add_argument(
        "--paper",
        choices=("A4", "A3", "Letter", "Tabloid"),
        help="instead of the layout's",
    )
    report.add_argument(
        "--orientation",
        choices=("portrait", "landscape"),
        help="of text pages; drawings and maps lie as they want it",
    )
    _add_unit(report)
    report.add_argument("--json", action="store_true", help="print what was written")
    report.set_defaults(run=_report)

    issue = commands.add_parser(
        "issue", help="freeze layout and report under a revision"
    )
    issue.add_argument("layout", metavar="LAYOUT", type=Path)
    issue.add_argument("--revision", required=True, metavar="NAME")
    issue.add_argument("--date", required=True, help="as it is to be printed")
    issue.add_argument("--note", default="", help="what the revision is for")
    issue.add_argument("--folder", type=Path, help="of the frozen files")
    _add_unit(issue)
    issue.add_argument("--json", action="store_true", help="print what was written")
    issue.set_defaults(run=_issue)

    changes = commands.add_parser(
        "changes", help="say what was edited and moved between two layouts"
    )
    changes.add_argument("old", metavar="OLD")
    changes.add_argument("new", metavar="NEW")
    _add_unit(changes)
    changes.add_argument("--json", action="store_true", help="print JSON, in tesla")
    changes.set_defaults(run=_changes)


def _add_unit(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--unit",
        type=_unit,
        metavar="UNIT",
        help="of flux density: " + ", ".join(units.FLUX_DENSITY_UNITS) + " (uT is µT)",
    )


def _unit(name: str) -> str:
    try:
        return units.flux_density_unit(name)
    except ValueError as error:
        raise argparse.ArgumentTypeError(str(error)) from None


def _share(text: str) -> float:
    """A share of one from "1%", "1 %" or "0.01"."""
    number = text.strip()
    divisor = 100.0 if number.endswith("%") else 1.0
    try:
        share = float(number.removesuffix("%")) / divisor
    except ValueError:
        share = 0.0
    if not 1e-6 <= share <= 1.0:
        raise argparse.ArgumentTypeError(
            f"{text!r} is not a tolerance; enter one from 0.0001% to 100%"
        )
    return share


def _assess(asked: argparse.Namespace) -> int:
    from engine.assessment import assess, exit_code
    from engine.exchange.linked_drawings import open_link_remarks
    from engine.remarks import remarks

    layout = layout_of(read(asked.layout), asked.variant)
    cases = None if asked.case is None else (_case(layout, asked.case),)
    assessment = assess(
        layout,
        cases=cases,
        certify=asked.certify,
        tolerance=asked.tolerance,
        progress=progress_line(),
    )
    unit = asked.unit or "µT"
    found = remarks(layout, assessment, unit=unit)
    found += open_link_remarks(layout, Path(asked.layout).parent)
    if asked.tables is not None:
        from engine.commands.tables import write_tables

        write_tables(assessment, found, unit, asked.tables)
    if asked.json:
        _print_json(assessed.as_json(assessment, found))
    else:
        sys.stdout.write(assessed.as_text(assessment, found, unit))
    return exit_code(assessment)


def _compare(asked: argparse.Namespace) -> int:
    from engine.commands import compared
    from engine.variant_comparison import compare_variants
    from engine.variant_remarks import variant_remarks

    layout = read(asked.layout)
    table = compare_variants(layout, progress=progress_line())
    found = tuple(variant_remarks(layout))
    if asked.json:
        _print_json(compared.as_json(table, found))
    else:
        sys.stdout.write(compared.as_text(table, found, asked.unit or "µT"))
    return DONE


def _report(asked: argparse.Namespace) -> int:
    from engine.report.choices import Choices
    from engine.report.writing import write_report

    choices = Choices(
        kind="note" if asked.note else "report",
        variant=asked.variant,
        unit=asked.unit,
        paper=asked.paper,
        orientation=asked.orientation,
        validate=not asked.without_checks,
    )
    write_report(read(asked.layout), asked.out, choices, progress=progress_line())
    return _written(asked.out, asked.json)


def _issue(asked: argparse.Namespace) -> int:
    from engine.commands.revisions import issue_revision

    frozen, printed = issue_revision(
        asked.layout,
        asked.revision,
        asked.date,
        folder=asked.folder,
        note=asked.note,
        unit=asked.unit,
        progress=progress_line(),
    )
    if asked.json:
        _print_json({"layout": str(frozen), "report": str(printed)})
        return DONE
    sys.stdout.write(f"Issued: {frozen}\n        {printed}\n")
    return DONE


def _changes(asked: argparse.Namespace) -> int:
    from engine.commands import revisions

    old, new = read(asked.old), read(asked.new)
    found, again = revisions.changes_between(old, new, progress=progress_line())
    if asked.json:
        _print_json(revisions.as_json(found, again))
        return DONE
    unit = asked.unit or new.settings.flux_density_unit
    names = revisions.names_of(old, new)
    sys.stdout.write(revisions.as_text(found, again, names, unit))
    return DONE


def _map(asked: argparse.Namespace) -> int:
    from engine.commands.horizontal_map import write_map

    layout = read(asked.layout)
    case = _case(layout, asked.case)
    write_map(
        layout,
        case,
        (asked.height,),
        asked.out,
        unit=asked.unit,
        progress=progress_line(),
    )
    _tell(_blocking(layout, case))
    return _written(asked.out, asked.json)


def _field(asked: argparse.Namespace) -> int:
    source = Path(asked.source)
    is_schedule = source.suffix.lower() == ".csv"
    layout = read_schedule(source) if is_schedule else read(source)
    case = _case(layout, asked.case)
    at = [points.parsed_point(text) for text in asked.at]
    values = points.field_at_points(layout, case, at)
    # A schedule's currents are taken as stated, open or not.
    blocking = () if is_schedule else _blocking(layout, case)
    if asked.json:
        _print_json(points.as_json(values))
    else:
        sys.stdout.write(points.as_text(values, asked.unit or "µT"))
    _tell(blocking)
    return DONE


def _schedule(asked: argparse.Namespace) -> int:
    write(asked.out, read_schedule(asked.csv))
    return _written(asked.out, asked.json)


def _validate(asked: argparse.Namespace) -> int:
    from engine.commands import validated

    found = validated.run(progress=progress_line())
    if asked.json:
        _print_json(validated.as_json(found))
    else:
        sys.stdout.write(validated.as_text(found))
    return DONE if all(outcome.agrees for outcome in found) else DISAGREES


def _case(layout: Layout, name: str | None) -> LoadCase:
    if name is None:
        return layout.cases[0]
    for case in layout.cases:
        if name in (case.id, case.name):
            return case
    known = ", ".join(f'"{case.title}"' for case in layout.cases)
    raise UserError(f'There is no load case "{name}" in this layout; it has {known}.')


def _blocking(layout: Layout, case: LoadCase) -> tuple[str, ...]:
    """What makes values not those of a real room, as sentences."""
    return tuple(f.sentence for f in faults(layout, case) if f.severity == "blocking")


def _tell(blocking: Sequence[str]) -> None:
    """Tell what blocks beside the output, whose form stays the same."""
    if blocking:
        complain("These values are not those of a real room:")
        for sentence in blocking:
            complain(f"  {sentence}")


def _written(path: Path, as_json: bool) -> int:
    if as_json:
        _print_json({"written": str(path)})
    else:
        sys.stdout.write(f"Written: {path}\n")
    return DONE


def _print_json(value: object) -> None:
    json.dump(value, sys.stdout, ensure_ascii=False, indent=1, allow_nan=False)
    sys.stdout.write("\n")


if __name__ == "__main__":
    sys.exit(main())
