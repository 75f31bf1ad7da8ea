"""Fixed texts of the report: method, limits of the model, cautions, states."""

from __future__ import annotations

#: State words of the design, each as a sentence.
STATE_SENTENCES: dict[str, str] = {
    "below": "below the reference level, uncertainty included",
    "below, U reaches": (
        "below the reference level, but the level lies within the uncertainty"
    ),
    "above, U reaches": (
        "above the reference level, and the level lies within the uncertainty"
    ),
    "above": "above the reference level, uncertainty included",
    "not evaluable": "no comparison was made, for the reason stated",
}

STATE_RULES: tuple[tuple[str, str], ...] = (
    ("below", "B + U ≤ L"),
    ("below, U reaches", "B ≤ L < B + U"),
    ("above, U reaches", "B − U ≤ L < B"),
    ("above", "B − U > L"),
    ("not evaluable", "a source, a value or a category is missing, or a fault blocks"),
)

#: What B is in the rules of the states.
STATE_VALUE = (
    "B in these rules is the largest value that was found, or at a receptor its value. "
    "Where a zone's largest value was found not above L and an upper bound of it is "
    "proven, the rules are applied to that bound with its own U instead, so that no "
    "place between the points looked at is missed; a bound that is above L by more "
    "than its U says “above, U reaches”, since only the bound is there. Where no bound "
    "is proven the refined maximum stands, and the notes say so: “no bound proven”."
)

INDIVIDUAL = (
    "Individual assessment is required for persons at particular risk, with their "
    "employer, their physician and the maker of any device; no state is given."
)

#: What the method assumes, and which way it acts.
METHOD_ASSUMPTIONS: tuple[tuple[str, str], ...] = (
    (
        "Current is even over the section of every conductor.",
        "Either way close to a conductor; small at more than two bar widths.",
    ),
    (
        "Conductors that share a circuit's label share its current equally unless "
        "entered otherwise.",
        "Either way; unequal sharing often raises the field.",
    ),
    (
        "Cores of multicore cables are straight, or the cable is its net current only, "
        "as entered.",
        "Straight cores: real twist lowers the field. Net current only: the field of "
        "the cores themselves is missing.",
    ),
    (
        "No factor of a shield, tray, enclosure or wall was applied to any value.",
        "Either way: metal lowers the field in some places and raises it in others.",
    ),
    (
        "No steel, reinforcement or transformer core; air everywhere.",
        "Either way near steel; the stray field of transformers is missing.",
    ),
    (
        "A free end of a run is closed by a straight link across its section.",
        "Either way near that end.",
    ),
    (
        "Where angles between circuits are unknown the worst over the unknown, or a "
        "named upper bound, stands for the value.",
        "Upwards: the true value is not larger.",
    ),
)

#: What reviewers usually ask, and the parts of the report that answer it.
QUESTIONS: tuple[tuple[str, tuple[str, ...]], ...] = (
    ("Which revision of which drawing?", ("documents",)),
    ("Where is the phase order from?", ("runs", "sections")),
    ("Are neutral and harmonic currents included?", ("sources", "currents")),
    ("What is the net current, and how is it known?", ("currents",)),
    ("Which operation: rated, highest, outage of one supply?", ("load cases",)),
    ("Is the ceiling height finished or structural?", ("site",)),
    ("Why these heights and this averaging?", ("zones as entered",)),
    ("Where does the level come from, which edition, for whom?", ("levels",)),
    ("Is the colour scale the same in all maps?", ("maps",)),
    ("What is the uncertainty near the level?", ("uncertainty",)),
    ("Who is competent, and who signs?", ("signatures",)),
    ("What happens if loads grow?", ("growth",)),
    ("Which version of the program, and was it validated?", ("method", "validation")),
    ("What was left out?", ("scope",)),
    ("Which options were considered?", ("options",)),
    ("Where are the numbers behind the picture?", ("attachments",)),
    ("Are wearers of implants addressed?", ("summary", "cautions")),
    ("Were factors of shields guaranteed?", ("method",)),
    ("Is the maximum not between grid points?", ("results", "method")),
)

METHOD: tuple[str, ...] = (
    "Every conductor is a chain of straight segments in space. The flux density of a "
    "segment follows from the law of Biot and Savart in closed form, B = µ0 I / 4π · "
    "(a × b)(|a| + |b|) / (|a||b|(|a||b| + a·b)), with a and b the vectors from its "
    "ends to the point and µ0 = 4π·10⁻⁷ H/m. Bars and thick cables are divided into "
    "filaments as their distance asks, the current even over the section.",
    "Currents are complex RMS phasors, e^(+jωt); a positive angle leads. Current is "
    "positive along the route, first vertex to last. Looking along the route u is to "
    "the right and v is up. x and y lie on the plan, z is up from the datum floor.",
    "Circuits of one base frequency add as phasors at each frequency. Equal "
    "frequencies of different bases, circuits whose phase relation is unknown, and "
    "harmonics of unknown angle are not added as phasors; the largest value over the "
    "unknown, or a named upper bound, is used.",
    "B is the RMS resultant, √(Σ |B_axis,f|²) over the three axes and all frequencies "
    "above 0 Hz; it is not the semi-major axis of the field's ellipse. DC is compared "
    "on its own and is in no AC total.",
    "Several frequencies count together by the rule of each level: the sum of B/L, the "
    "root of the sum of (B/L)², or the weighted peak (ICNIRP 2010, eq. 7): the largest "
    "value over the cycle of all frequencies, each over its level as amplitudes and "
    "turned by 90° times the exponent with which the level falls. For a single "
    "frequency whose field turns, it is below B/L. Where angles are unknown, it is the "
    "sum of the weighted peaks that are known, an upper bound.",
    "The largest value of a zone is searched between grid points too; how, and down to "
    "which distance, stands under the table of zones. Points inside conductors, in "
    "closed enclosures, within the front clearance of open ones and within the zone's "
    "clearance are masked, not assessed, and their share is stated. Nearer than two "
    "bar widths or diameters to a conductor the value counts and is marked “near "
    "field, even current assumed”: real current crowds to the edges.",
    "A free end of a run is closed across its section by an assumed link, since the "
    "field of a current that does not close has no physical meaning. Parallel "
    "conductors share their current equally unless stated otherwise: an assumption.",
    "U is the expanded uncertainty, relative part times B plus an absolute part, as "
    "entered or from the budget of the place. B is compared with the reference level L "
    "by five states; the decision rule and who chose it decide only how a summary "
    "counts them. " + STATE_VALUE,
)

NOT_MODELLED: tuple[str, ...] = (
    "steel, reinforcement, enclosures of metal, cable trays, screens and the eddy "
    "currents in them",
    "stray fields of transformer cores and windings, reactors and other apparatus, "
    "unless entered as conductors",
    "uneven current over the section of a conductor (skin and proximity effect), and "
    "unequal sharing between parallel conductors unless entered",
    "sources that were not entered: other tenants, lines and cables outside, wiring "
    "faults, currents in pipes and structure",
    "transients, switching, faults, and frequencies not entered",
    "electric fields and radio-frequency fields",
)

CAUTIONS: tuple[str, ...] = (
    "The values are calculated, not measured. They hold for the undisturbed field and "
    "are no more accurate than the currents and positions entered. Confirm them by "
    "measurement when the installation is put to use.",
    "The reference levels were entered by the user. Lodestead supplies no level, and "
    "neither supplies nor interprets law. Local regulation, permits and licensed, "
    "competent practice decide.",
    "This report is not a statement on health, and not medical advice.",
    "It does not clear persons with active or passive implants or with devices worn on "
    "the body, nor pregnant workers. They need an individual assessment with their "
    "employer, their physician and the maker of the device; standards on levels say "
    "themselves that they may not protect those who wear devices.",
    "It does not serve the design of electrical safety, protection, current-carrying "
    "capacity, short-circuit forces, touch voltage, contact currents, transients, "
    "faults or radio-frequency exposure.",
    "Whether equipment works undisturbed is subject to the site specification of its "
    "maker.",
    "Factors of shields and enclosures are estimates until a test has proven them.",
    "Steel, reinforcement, the stray fields of transformers and sources that are not "
    "listed are not included unless the report says so.",
    "Work on live parts, opening of boards, and changes of neutral or earth are for "
    "qualified persons only. Do not remove protective bonding to reduce a field.",
    "The report is valid only for the stated revision, loads and layout.",
)

#: What even the shortest document says.
NOTE_CAUTIONS: tuple[str, ...] = (CAUTIONS[0], CAUTIONS[1], CAUTIONS[2], CAUTIONS[3])

NO_LEVELS = (
    "No reference level was entered, so nothing is compared. The program ships none."
)

SIGN_OFF = (
    "Those who sign state that they are competent for their part, and that they know "
    "the assumptions, the remarks and the cautions of this report."
)
