"""The fact codes that ``[field] facts`` may hold, each with what it says in plain words."""

from collections.abc import Mapping
from types import MappingProxyType

FACTS: Mapping[str, str] = MappingProxyType(
    {
        # what the crew does to the ground
        "ground-penetration": "the ground is penetrated",
        "hand-auger": "a hand auger is used",
        "drill-rig": "a drill rig or direct-push rig is used",
        "tall-equipment": "a mast, long pole or raised boom is used",
        "overhead-lines": "there are overhead lines on or beside the site",
        "trench": "a trench or pit is dug or entered",
        "vault": "a manhole, vault or other enclosed space is opened or entered",
        # what may be there
        "suspected-contamination": "a release is known or suspected",
        "tanks-or-drums": "there are, or were, tanks or drums",
        "landfill": "the site is or was a landfill",
        "military-history": "the site was a range, other military land or bombed in wartime",
        # water
        "wading": "the crew wades",
        "boat": "the crew works from a boat",
        "bridge": "the crew works from a bridge or a quay",
        "ice": "the crew works on ice",
        "near-water": "the crew works at the edge of open water",
        "navigable-water": "something is cored, placed or anchored in navigable water",
        # surroundings
        "road": "the crew works within a road's right of way",
        "rail": "the crew works within a railway's right of way",
        "heat": "hot weather is likely",
        "cold": "cold weather is likely",
        "storms": "thunderstorms or high wind are likely",
        "flood-prone": "the site can flood",
        "smoke": "wildfire smoke is likely",
        "short-daylight": "daylight is short",
        "insects": "ticks or stinging insects are likely",
        "snakes": "snakes are likely",
        "dogs": "dogs are likely",
        "livestock": "there is livestock",
        "harmful-plants": "harmful plants are likely",
        "sewage": "there is sewage",
        "algae": "there may be a bloom of algae",
        "rodents": "there are rodent droppings or nests",
        "alone": "one person works alone",
        "no-coverage": "there is no phone coverage",
        # what is carried, moved and left
        "preservatives-carried": "acids, methanol or other preservatives are carried",
        "hazardous-samples": "samples may be hazardous or infectious when shipped",
        "quarantine-area": "soil or plants come from a quarantine area",
        "soil-abroad": "soil crosses a national border",
        "moves-between-waters": "boats, boots or gear move between waters",
        "purge-water": "purge water has to be disposed of",
        "cuttings": "drill cuttings or spoil have to be disposed of",
        "wash-water": "water from washing equipment has to be disposed of",
        "trace-analytes": "the analytes are found everywhere at trace levels",
        # land and people
        "own-land": "the party that samples owns the land",
        "land-owned-by-others": "somebody else owns the land",
        "wetland": "there is a wetland",
        "protected-species": "a protected species or its season is concerned",
        "heritage": "there may be heritage, burials or archaeology",
        "park": "the site lies in a park or reserve",
        "wells-installed": "wells are drilled, repaired or closed",
        "boundary-surveyed": "a legal boundary has to be surveyed",
    }
)
"""Code to meaning; a code switches on the cautions that name it."""
