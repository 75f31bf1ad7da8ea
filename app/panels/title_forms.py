"""What can be edited of the title block, and the texts of the house in the report."""

from __future__ import annotations

from app.panels.kinds import Lines, Words
from app.panels.parts import Group, Part
from engine.layout import Layout

DOCUMENT = (
    Part("project", "Project", Words(), "Printed in the title block"),
    Part("client", "Client", Words(), "Printed in the title block"),
    Part("document_number", "Number", Words(), "Number of the document"),
    Part("revision", "Revision", Words(), "Revision of the document"),
    Part("status", "Status", Words(), "Status of the document, such as draft"),
    Part("date", "Date", Words(), "Date of the document, as it is to be printed"),
)

_PEOPLE = (
    Part("prepared_by", "Prepared by", Words(), "Who prepared it"),
    Part("checked_by", "Checked by", Words(), "Who checked it"),
    Part("approved_by", "Approved by", Words(), "Who approved it"),
)

_COMPETENCE = Part(
    "competence",
    "Competence",
    Lines(),
    "Why those who sign are competent, in their words",
)

_QUESTION = Part(
    "question", "Question", Lines(), "The question that the calculation answers"
)
_SCOPE = Part("scope", "Scope", Lines(), "What is looked at and what is not")
_CONCLUSIONS = Part(
    "conclusions", "Conclusions", Lines(), "Conclusions in the user's words"
)

_EXCLUSIONS = Part(
    "exclusions",
    "Left out on purpose",
    Lines(),
    "What is left out on purpose, beside what the program never models",
    "what is left out",
)

_HOUSE = (
    Part(
        "letterhead",
        "Letterhead",
        Lines(),
        "The house that issues the document: name and address, six lines, under the "
        "logo",
    ),
    Part(
        "closing",
        "Closing text",
        Lines(),
        "A text of the house before the signatures: terms, distribution, thanks",
    ),
)


def title_groups(layout: Layout) -> tuple[Group, ...]:
    """The title block and who signs."""
    title = (layout.title,)
    return (
        Group("Document", title, DOCUMENT),
        Group("Signatures", title, (*_PEOPLE, _COMPETENCE)),
    )


def text_groups(layout: Layout) -> tuple[Group, ...]:
    """Texts of the author and of the house."""
    title = (layout.title,)
    return (
        Group("Author", title, (_QUESTION, _SCOPE, _EXCLUSIONS, _CONCLUSIONS)),
        Group("House", title, _HOUSE),
    )
