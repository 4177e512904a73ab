"""Topics that a crew must settle with somebody else before work: what raises them, who decides.

No topic instructs and none gives a number for depth, dose, equipment or exposure. Rules named are
examples of where to ask; which of them apply is for the user and the authority to say.
"""

from dataclasses import dataclass

ALWAYS = "always"
"""Stands among ``raised_by`` for a topic that no campaign is without."""


@dataclass(frozen=True)
class Topic:
    """One caution topic.

    Parameters
    ----------
    name : str
        As printed, and as a ``[[clearance]]`` names it.
    defers_to : str
        Who decides, with examples of rules.
    raised_by : tuple of str
        Fact codes, any of which raises the topic.
    holds_work : bool
        Field work waits until a reference, its date and its expiry are typed.
    """

    name: str
    defers_to: str
    raised_by: tuple[str, ...]
    holds_work: bool = False


TOPICS: tuple[Topic, ...] = (
    Topic(
        "underground utilities",
        "The utility location service under local law, a private locator beyond the meter, and the "
        "site owner's records. For example US: 29 CFR 1926.651(b) and state one-call law; UK: "
        "HSG47 and PAS 128; Australia: the before-you-dig enquiry.",
        ("ground-penetration", "hand-auger", "drill-rig", "trench"),
        holds_work=True,
    ),
    Topic(
        "access and permission",
        "The land owner's and the tenant's written consent, local trespass law, and counsel where "
        "law gives a right to split samples.",
        ("land-owned-by-others",),
        holds_work=True,
    ),
    Topic(
        "munitions",
        "The explosives authority; anomaly avoidance is for qualified personnel only.",
        ("military-history",),
        holds_work=True,
    ),
    Topic(
        "work on, in or over water",
        "The employer's water rules and briefing, the boating authority, and whoever operates dams "
        "and bridges. For example US: 29 CFR 1926.106.",
        ("wading", "boat", "bridge", "ice", "near-water"),
        holds_work=True,
    ),
    Topic(
        "confined space and excavation entry",
        "A person qualified for confined spaces and the employer's entry permit. For example US: "
        "29 CFR 1910.146 and 29 CFR 1926 subparts P and AA.",
        ("trench", "vault"),
        holds_work=True,
    ),
    Topic(
        "overhead lines",
        "The utility that owns the lines. For example US: 29 CFR 1926.1408 and 29 CFR 1910.333.",
        ("overhead-lines", "drill-rig", "tall-equipment"),
    ),
    Topic(
        "hazardous-site work",
        "A qualified safety professional, the employer's training and medical programme. For "
        "example US: 29 CFR 1910.120, whose scope takes in first looks before anything is proved.",
        ("suspected-contamination", "tanks-or-drums", "landfill"),
    ),
    Topic(
        "road and rail",
        "The road authority's traffic control plan, the railway owner's permit. For example US: "
        "MUTCD part 6.",
        ("road", "rail"),
    ),
    Topic(
        "weather and daylight",
        "The employer's policies on heat, cold and lightning, and the forecast office.",
        ("heat", "cold", "storms", "flood-prone", "smoke", "short-daylight"),
    ),
    Topic(
        "animals, plants and germs",
        "The employer's health programme.",
        ("insects", "snakes", "dogs", "livestock", "harmful-plants", "sewage", "algae", "rodents"),
    ),
    Topic(
        "working alone or out of reach",
        "The employer's rule on lone work and its check-in plan.",
        ("alone", "no-coverage"),
    ),
    Topic(
        "chemicals carried",
        "The safety data sheets, the carrier's rules and a trained shipper. For example US: 49 "
        "CFR; by air: IATA rules.",
        ("preservatives-carried",),
    ),
    Topic(
        "shipping samples",
        "A trained shipper and the laboratory. For example US: 40 CFR 261.4(d), which is "
        "conditional, and 49 CFR 172.101(c)(11).",
        ("hazardous-samples",),
    ),
    Topic(
        "soil movement and biosecurity",
        "The plant health or invasive species authority. For example US: a USDA APHIS soil permit "
        "or agreement.",
        ("quarantine-area", "soil-abroad", "moves-between-waters"),
    ),
    Topic(
        "protected places",
        "The land manager's permit, the heritage and the nature authority; on a discovery, stop "
        "and notify. For example US: NHPA, ARPA, NAGPRA.",
        ("wetland", "protected-species", "heritage", "park"),
    ),
    Topic(
        "permits for work in waters",
        "The authority for navigable waters and its state or regional equivalents. For example US: "
        "the district engineer, nationwide permits 5 and 6.",
        ("navigable-water",),
    ),
    Topic(
        "waste from sampling",
        "The waste authority's rules; the site owner as the one who produces the waste.",
        ("purge-water", "cuttings", "wash-water"),
    ),
    Topic(
        "trace contamination by the crew",
        "The programme's own sampling protocol and the laboratory that supplies blank water.",
        ("trace-analytes",),
    ),
    Topic(
        "analytical method, holding and preservation",
        "The laboratory, the permit and the method it names. For example US: 40 CFR 136 or SW-846.",
        (ALWAYS,),
    ),
    Topic(
        "separate safety plan",
        "The employer: this packet is no health and safety plan. For example US: 29 CFR "
        "1910.120(b)(4).",
        (ALWAYS,),
    ),
    Topic(
        "licensed work",
        "A licensed driller, surveyor, geologist or engineer, an accredited laboratory, or "
        "counsel, each for what local law reserves to them.",
        (ALWAYS, "wells-installed", "boundary-surveyed"),
    ),
)
