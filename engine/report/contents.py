"""The report's sections in their order."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from reportlab.platypus import Flowable

from engine.drawing import Plan, plan
from engine.open_boards import open_board_sentences
from engine.picture import MapSubject, Picture, Raster, map_picture
from engine.report import (
    appendix,
    closing,
    inputs,
    method,
    risk,
    scope,
    sensitivity,
    sources,
)
from engine.report.attachments import Attachment
from engine.report.budgets import budget_section
from engine.report.choices import Orientation, Paper
from engine.report.drawings import HEADING_ROOM, Sheeted, room_views, sheeted
from engine.report.figures import FigureRow
from engine.report.front import front_page, overview
from engine.report.maps import plan_of_map
from engine.report.matter import Matter
from engine.report.names import Wording
from engine.report.options import options
from engine.report.page import Pages
from engine.report.profile_section import profile_section
from engine.report.receptor_tables import measured_section, receptor_section
from engine.report.retraced import retraced
from engine.report.section_figures import (
    MOST_SECTIONS,
    numbered_sections,
    section_pictures,
)
from engine.report.story import Story
from engine.report.text import NOTE, bullets, gap, paragraph
from engine.report.wording import CAUTIONS
from engine.report.zone_tables import contribution_tables, zone_section

#: Another orientation must make a map this much larger to be worth a turned page.
_WORTH = 1.2

#: A map on half a page may be this much smaller than on a page of its own.
_LOST = 1.3

#: Of a page that is filled less than this, a half does for a map, if its field is still
#: this wide. [mm]
_MUCH_LEFT, _LEAST_FIELD = 0.75, 55.0

#: Under a figure. [mm]
_BELOW = 3.5

#: Between sections side by side. [mm]
_GAP = 4.0


#: A picture, and how its page lies.
_OnPage = tuple[Picture, Orientation]


@dataclass(frozen=True, eq=False)
class Drawn:
    """Every picture of the report, made once however often it is laid out."""

    rooms: tuple[tuple[str, Sheeted], ...]
    maps: tuple[tuple[str, Picture, Orientation], ...]
    sections: tuple[tuple[Picture, str], ...]


def drawn(matter: Matter, sheet: Paper) -> Drawn:
    """The pictures of a report."""
    across = 3 if sheet.orientation == "landscape" else 2
    width = (sheet.text_width - (across - 1) * _GAP) / across
    return Drawn(
        rooms=tuple((view.title, sheeted(view, sheet)) for view in room_views(matter)),
        maps=tuple(_map_pictures(matter, sheet)),
        sections=section_pictures(matter.layout, width),
    )


def _map_pictures(
    matter: Matter, sheet: Paper
) -> Sequence[tuple[str, Picture, Orientation]]:
    found: list[tuple[str, _OnPage, _OnPage | None]] = []
    drawing = plan(matter.layout, matter.conductors)
    for each in matter.maps:
        shown = plan_of_map(drawing, each)
        for subject in each.subjects:
            untitled = replace(subject, title="")
            whole, half = _map_on_a_page(untitled, shown, sheet)
            found.append((subject.title, whole, half))
    return [(title, *on_page) for title, on_page in _paired(found)]


def _paired(
    found: Sequence[tuple[str, _OnPage, _OnPage | None]],
) -> Sequence[tuple[str, _OnPage]]:
    """Halves where two come one after the other, else maps on pages of their own."""
    made: list[tuple[str, _OnPage]] = []
    waiting = [*found]
    while waiting:
        title, whole, half = waiting.pop(0)
        next_half = waiting[0][2] if waiting else None
        if half is None or next_half is None:
            made.append((title, whole))
            continue
        made += [(title, half), (waiting.pop(0)[0], next_half)]
    return made


def _map_on_a_page(
    subject: MapSubject, shown: Plan, sheet: Paper
) -> tuple[_OnPage, _OnPage | None]:
    """A map on a page of its own, and on half of one where little is lost by that."""
    whole, turned = (
        map_picture(
            subject, shown, width=p.text_width, height=p.text_height - HEADING_ROOM
        )
        for p in (sheet, sheet.turned)
    )
    half_height = 0.5 * sheet.text_height - HEADING_ROOM - _BELOW
    half = map_picture(subject, shown, width=sheet.text_width, height=half_height)
    sizes = [_drawn_size(picture) for picture in (whole, turned, half)]
    chosen = (whole, sheet.orientation)
    if sizes[1] > _WORTH * sizes[0]:
        chosen = (turned, sheet.turned.orientation)
    leaves_much = whole.height < _MUCH_LEFT * sheet.text_height
    is_near = _LOST * sizes[2] >= max(sizes[:2])
    is_enough = leaves_much and sizes[2] >= min(_LEAST_FIELD, sizes[0])
    if half.height <= half_height and (is_near or is_enough):
        return chosen, (half, sheet.orientation)
    return chosen, None


def _drawn_size(picture: Picture) -> float:
    """Width of the field on paper. [mm]"""
    field = next(part for part in picture.parts if isinstance(part, Raster))
    return field.box[2] - field.box[0]


def story(
    matter: Matter,
    pictures: Drawn,
    attachments: Sequence[Attachment],
    words: Wording,
    sheet: Paper,
    pages: Pages,
) -> list[Flowable]:
    """All that the report prints, title block aside."""
    told = Story(sheet, pages)
    layout, width = matter.layout, sheet.text_width
    told.add(front_page(matter, words, sheet, told))
    told.break_page()
    at = len(told.flowables)
    told.section("scope", "Scope and exclusions", scope.scope(matter, width))
    told.section(
        "levels",
        "Reference levels as entered",
        inputs.levels(layout, words.unit, width),
    )
    told.section("documents", "Input documents", inputs.documents(layout, width))
    _site(told, matter, pictures, words)
    _sources(told, matter, pictures)
    told.section("assumptions", "Assumptions", inputs.assumption_list(layout, width))
    told.subsection("Where the other values come from", inputs.origins(layout, width))
    told.section(
        "method", "Method and conventions", method.method(matter, words, width)
    )
    _validation(told, matter)
    _results(told, matter, pictures, words)
    _last(told, matter, words)
    appendix.appendix(told, matter, attachments)
    told.flowables[at:at] = overview(told)
    return told.flowables


def _site(told: Story, matter: Matter, pictures: Drawn, words: Wording) -> None:
    layout, width = matter.layout, told.sheet.text_width
    told.section("site", "Site, zones and receptors", inputs.places(layout, width))
    told.subsection(
        "Zones", inputs.zones(layout, words.unit, width), key="zones as entered"
    )
    told.subsection(
        "Receptors", inputs.receptors(layout, width), key="receptors as entered"
    )
    told.subsection("Settings", inputs.settings(layout, words.unit, width))
    for k, (title, sheeted_picture) in enumerate(pictures.rooms):
        key = "drawings" if k == 0 else f"drawing {k}"
        shown = f"{title}: rooms, zones, runs and equipment. Tables have their places."
        told.figure(
            title, key, sheeted_picture.picture, sheeted_picture.orientation, shown
        )
    if not pictures.rooms:
        told.subsection("Drawings", [paragraph("Omitted: nothing is drawn.")])


def _sources(told: Story, matter: Matter, pictures: Drawn) -> None:
    layout, width = matter.layout, told.sheet.text_width
    told.section("sources", "Sources", sources.circuits(layout, width))
    told.subsection("Load cases", sources.load_cases(layout, width), key="load cases")
    for k, case in enumerate(layout.cases):
        told.subsection(
            f"Currents used in “{case.title}”",
            sources.currents(layout, case, width),
            key="currents" if k == 0 else "",
        )
    told.add([paragraph(sources.NET_CURRENT, NOTE)])
    told.subsection("Runs", sources.runs(layout, width), key="runs")
    told.subsection(
        "Sections of the runs", _sections(told, matter, pictures), key="sections"
    )
    told.subsection("Equipment", sources.equipment(layout, width))
    closed = [c.item for c in matter.conductors if c.role == "closing link"]
    names = {item.id: item.title for item in layout.items()}
    titles = [names.get(item, item) for item in dict.fromkeys(closed)]
    told.subsection("Joints and ends", sources.joints(layout, titles, width))


def _sections(told: Story, matter: Matter, pictures: Drawn) -> list[Flowable]:
    if not pictures.sections:
        return [paragraph("Omitted: no run was entered.")]
    made: list[Flowable] = []
    wide = pictures.sections[0][0].width
    across = max(1, int((told.sheet.text_width + _GAP + 0.01) // (wide + _GAP)))
    for first in range(0, len(pictures.sections), across):
        row = pictures.sections[first : first + across]
        shown, alternatives = zip(*row, strict=True)
        made += [FigureRow(shown, _GAP, alternatives), gap(2.0)]
    count = len(numbered_sections(matter.layout))
    if count > MOST_SECTIONS:
        text = f"Sections without a drawing here: {count - MOST_SECTIONS}."
        made.append(paragraph(text))
    return made


def _validation(told: Story, matter: Matter) -> None:
    title = "Validation of the program"
    if matter.outcomes is None:
        told.omitted("validation", title, "the outside checks were not asked for.")
        return
    told.section(
        "validation", title, method.validation(matter.outcomes, told.sheet.text_width)
    )


def _results(told: Story, matter: Matter, pictures: Drawn, words: Wording) -> None:
    assessment, width = matter.assessment, told.sheet.text_width
    told.section("results", "Results: zones", zone_section(assessment, words, width))
    told.section(
        "receptors", "Results: receptors", receptor_section(assessment, words, width)
    )
    if pictures.maps:
        text = (
            "One map for each height of a zone, in the load case of most concern "
            "there. All have one colour scale; iso-lines carry their values."
        )
        if matter.left_out:
            text += f" Heights of zones without a map here: {matter.left_out}."
        told.section("maps", "Results: maps", [paragraph(text)])
    else:
        told.omitted("maps", "Results: maps", _no_map(matter))
    for k, (title, picture, lying) in enumerate(pictures.maps):
        shown = f"Map, {title}. The attached files have the values."
        told.figure(title, f"map {k}", picture, lying, shown)
    tables = contribution_tables(assessment, words, width)
    tables += retraced(matter, words, width)
    grown = sensitivity.load_growth(assessment, words, width)
    if tables or grown:
        told.section("contributions", "Contributions and sensitivity", tables, grown)
    else:
        reason = "no value was determined, so nothing can be apportioned."
        told.omitted("contributions", "Contributions and sensitivity", reason)
    profiles = profile_section(matter, words, width)
    if profiles:
        told.section("profiles", "Results: profiles", profiles)
    else:
        reason = "no profile was drawn, or no current flows along it."
        told.omitted("profiles", "Results: profiles", reason)
    considered = options(matter, words, width)
    if considered:
        told.section("options", "Options considered", considered)
    else:
        told.omitted("options", "Options considered", "the layout has no variant.")
    measured = measured_section(assessment, words, width)
    if measured:
        told.section("measurements", "Measurements", measured)
    else:
        reason = "no receptor has a measured value. " + CAUTIONS[0].partition(". ")[0]
        told.omitted("measurements", "Measurements", reason + ".")


def _no_map(matter: Matter) -> str:
    if not matter.layout.zones:
        return "no zone was entered."
    return "the field is not determined at any height of a zone."


def _last(told: Story, matter: Matter, words: Wording) -> None:
    width = told.sheet.text_width
    told.section(
        "uncertainty",
        "Uncertainty and decision rule",
        risk.uncertainty(matter.assessment, words, width),
        budget_section(matter.budgets, words, width),
    )
    told.section(
        "remarks", "Remarks not cleared", closing.remarks(matter, words, width)
    )
    cautions = (*CAUTIONS, *open_board_sentences(matter.layout))
    told.section("cautions", "Cautions and deferrals", bullets(cautions))
    told.section("conclusions", "Conclusions and actions", closing.conclusions(matter))
    told.section("revisions", "Revisions issued", closing.revisions(matter, width))
    told.section("signatures", "Signatures", closing.signatures(matter, width))
