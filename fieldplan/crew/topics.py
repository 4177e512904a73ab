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
        "the utility location service under local law, a private locator beyond the meter, and the "
        "site owner's records; for example US: 29 CFR 1926.651(b) and state one-call law; UK: "
        "HSG47 and PAS 128; Australia: the before-you-dig enquiry",
        ("ground-penetration", "hand-auger", "drill-rig", "trench"),
        holds_work=True,
    ),
    Topic(
        "access and permission",
        "the land owner's and the tenant's written consent, local trespass law, and counsel where "
        "law gives a right to split samples",
        ("land-owned-by-others",),
        holds_work=True,
    ),
    Topic(
        "munitions",
        "the explosives authority; anomaly avoidance is for qualified personnel only",
        ("military-history",),
        holds_work=True,
    ),
    Topic(
        "work on, in or over water",
        "the employer's water rules and briefing, the boating authority, and whoever operates dams "
        "and bridges; for example US: 29 CFR 1926.106",
        ("wading", "boat", "bridge", "ice", "near-water"),
        holds_work=True,
    ),
    Topic(
        "confined space and excavation entry",
        "a person qualified for confined spaces and the employer's entry permit; for example US: "
        "29 CFR 1910.146 and 29 CFR 1926 subparts P and AA",
        ("trench", "vault"),
        holds_work=True,
    ),
    Topic(
        "overhead lines",
        "the utility that owns the lines; for example US: 29 CFR 1926.1408 and 29 CFR 1910.333",
        ("overhead-lines", "drill-rig", "tall-equipment"),
    ),
    Topic(
        "hazardous-site work",
        "a qualified safety professional, the employer's training and medical programme; for "
        "example US: 29 CFR 1910.120, whose scope takes in first looks before anything is proved",
        ("suspected-contamination", "tanks-or-drums", "landfill"),
    ),
    Topic(
        "road and rail",
        "the road authority's traffic control plan, the railway owner's permit; for example US: "
        "MUTCD part 6",
        ("road", "rail"),
    ),
    Topic(
        "weather and daylight",
        "the employer's policies on heat, cold and lightning, and the forecast office",
        ("heat", "cold", "storms", "flood-prone", "smoke", "short-daylight"),
    ),
    Topic(
        "animals, plants and germs",
        "the employer's health programme",
        ("insects", "snakes", "dogs", "livestock", "harmful-plants", "sewage", "algae", "rodents"),
    ),
    Topic(
        "working alone or out of reach",
        "the employer's rule on lone work and its check-in plan",
        ("alone", "no-coverage"),
    ),
    Topic(
        "chemicals carried",
        "the safety data sheets, the carrier's rules and a trained shipper; for example US: 49 "
        "CFR; by air: IATA rules",
        ("preservatives-carried",),
    ),
    Topic(
        "shipping samples",
        "a trained shipper and the laboratory; for example US: 40 CFR 261.4(d), which is "
        "conditional, and 49 CFR 172.101(c)(11)",
        ("hazardous-samples",),
    ),
    Topic(
        "soil movement and biosecurity",
        "the plant health or invasive species authority; for example US: a USDA APHIS soil permit "
        "or agreement",
        ("quarantine-area", "soil-abroad", "moves-between-waters"),
    ),
    Topic(
        "protected places",
        "the land manager's permit, the heritage and the nature authority; on a discovery, stop "
        "and notify; for example US: NHPA, ARPA, NAGPRA",
        ("wetland", "protected-species", "heritage", "park"),
    ),
    Topic(
        "permits for work in waters",
        "the authority for navigable waters and its state or regional equivalents; for example US: "
        "the district engineer, nationwide permits 5 and 6",
        ("navigable-water",),
    ),
    Topic(
        "waste from sampling",
        "the waste authority's rules; the site owner as the one who produces the waste",
        ("purge-water", "cuttings", "wash-water"),
    ),
    Topic(
        "trace contamination by the crew",
        "the programme's own sampling protocol and the laboratory that supplies blank water",
        ("trace-analytes",),
    ),
    Topic(
        "analytical method, holding and preservation",
        "the laboratory, the permit and the method it names; for example US: 40 CFR 136 or SW-846",
        (ALWAYS,),
    ),
    Topic(
        "separate safety plan",
        "the employer: this packet is no health and safety plan; for example US: 29 CFR "
        "1910.120(b)(4)",
        (ALWAYS,),
    ),
    Topic(
        "licensed work",
        "a licensed driller, surveyor, geologist or engineer, an accredited laboratory, or "
        "counsel, each for what local law reserves to them",
        (ALWAYS, "wells-installed", "boundary-surveyed"),
    ),
)
