"""What each key of the campaign file is, in one line: for errors, editors and the reference."""

from fieldplan.campaign import field_reading
from fieldplan.campaign.questions import meanings

MEANING: dict[str, str] = {
    "format": "the version of this file format",
    # [plan]
    "plan": "what the campaign is called, who prepared it and when",
    "plan.id": "short identifier of the plan; opens the name of every packet",
    "plan.title": "title printed on every page",
    "plan.revision": "number of the revision, where it is kept by hand",
    "plan.prefix": "letters that open sample ids and made names of places; else taken from the id",
    "plan.site": "name of the site",
    "plan.prepared_by": "who prepared the plan",
    "plan.reviewed_by": "who reviewed the plan",
    "plan.decides": "who decides on the strength of the results",
    "plan.prepared_on": "the day on which the plan was prepared",
    "plan.fieldwork_from": "first day of field work",
    "plan.fieldwork_to": "last day of field work, not before the first",
    "plan.background": "what is known of the site, in sentences",
    "plan.decision": "the decision that waits for the results, in sentences",
    # [[analyte]]
    "analyte": "what the laboratory measures",
    "analyte.id": "identifier of the analyte, as other tables and the lab files name it",
    "analyte.name": "name of the analyte as printed",
    "analyte.unit": "the laboratory's unit, such as mg/kg; all amounts of the analyte are in it",
    "analyte.matrix": "what is sampled, such as soil, groundwater or sediment",
    "analyte.basis": "dry weight or wet weight",
    "analyte.fraction": "total or dissolved",
    "analyte.laboratory_names": "other names under which laboratories report the analyte",
    "analyte.reporting_limit": "the lowest amount that the laboratory reports as a number",
    "analyte.action_level": "the amount with which the mean is compared",
    "analyte.action_level_source": "the document and the date from which the action level comes",
    # [[frame]]
    "frame": "the population that the mean shall speak for",
    "frame.id": "identifier of the frame",
    "frame.kind": "whether locations are places in an area or along lines, or members of a list",
    "frame.boundary": "file with the outline of the site",
    "frame.boundary_assumed": "whether the outline is a circle or a sketch; stamped ASSUMED",
    "frame.crs": "coordinate reference system of files that do not name one, such as EPSG:25832",
    "frame.strata": "file with one polygon or more for each stratum",
    "frame.stratum_column": "column of the strata file, list or lines that names the stratum",
    "frame.list_file": "CSV of all members of the population: wells, outfalls, plots, stations",
    "frame.line_file": "file with the lines of the population: rivers, shores, ditches",
    "frame.branch_column": "column of the file of lines that names the branch",
    "frame.columns": (
        "names of the columns of the list, or of corners: ours on the left, the file's on the right"
    ),
    "frame.exclusion": "a part of the site that is left out of the population",
    "frame.exclusion.file": "file with the polygons, lines or points that are left out",
    "frame.exclusion.buffer_m": "metres around them that are left out as well",
    "frame.exclusion.reason": "why this part is left out",
    "frame.inset_m": "metres that locations keep from the edge of the site, or a line's free ends",
    "frame.accept_shift_accuracy_m": "metres of doubt accepted in the datum shift of the files",
    "frame.unit_is": "what one location of the population is, in words",
    "frame.depth_top_m": "top of the sampled interval in metres below the datum",
    "frame.depth_bottom_m": "bottom of the sampled interval in metres, below its top",
    "frame.depth_datum": "from where depths are measured, such as ground surface",
    "frame.size_fraction": "the grain size that is analysed, such as < 2 mm",
    "frame.time_window": "the span of time that the results speak for",
    "frame.why_this_area": "why one mean over this area answers the question",
    # [[event]]
    "event": "one round of field work",
    "event.id": "identifier of the round",
    "event.note": "what is special about the round",
    # [[design]]
    "design": "how locations are laid out and shared between strata",
    "design.id": "identifier of the design",
    "design.frame": "the frame that it samples; may be left out where there is one",
    "design.layout": "how locations are drawn",
    "design.per_cell": "locations in each cell of compact-strata",
    "design.variance": "what the variance of a spread layout is estimated from, fixed beforehand",
    "design.allocation": "how locations are shared between strata",
    "design.equal_in": "what equal-precision makes the same in every stratum's own mean",
    "design.floor": "the fewest locations of a stratum; a variance needs 2",
    "design.least": "the fewest results by stratum, where more than the floor",
    "design.most": "the most locations that can be visited, by stratum",
    "design.alternates": "places in reserve per stratum, drawn at the same time",
    "design.minimum_spacing_m": "metres that two locations keep apart at least",
    "design.exact_count": "whether a grid is drawn again until it has the planned count",
    "design.starts": "independent random starts of even-spacing; two or more yield a variance",
    "design.locations": "number of locations fixed by hand instead of by the target",
    "design.increments": "increments in each composite; 1 where every result is its own sample",
    "design.increments_at": (
        "whether each increment of a composite has its own random place or all lie round one"
    ),
    "design.replicates": "composites in all, fixed by hand instead of by the target",
    "design.ranking_set_size": "places that are ranked by a cheap sign before one is sampled",
    "design.ranking_correlation": "correlation between the cheap sign and the result",
    "design.why": "why this design was chosen",
    # [[targeted]]
    "targeted": "places chosen by judgement; they never enter the mean",
    "targeted.file": "file with the places",
    "targeted.columns": "names of its columns: ours on the left, the file's on the right",
    "targeted.reason": "why these places are looked at",
    # [[objective]]
    "objective": "the question and how well it must be answered",
    "objective.design": "the design that answers it; may be left out where there is one",
    "objective.analyte": "the analyte that it asks about; may be left out where there is one",
    "objective.question": "what is asked of the population",
    "objective.standard_error": "the largest standard error of the mean, in the analyte's unit",
    "objective.half_width": "the largest distance from the mean to an end of its interval",
    "objective.relative_half_width": "the half-width as a share of the mean: 0.20 for 20 %",
    "objective.budget": "the money that may be spent, in the currency of [cost]",
    "objective.assurance": (
        "how sure it shall be that n is enough, though sigma is an estimate; not beside a budget"
    ),
    "objective.assurance_chosen_by": "who chose the assurance; printed beside it",
    "objective.decides_n": (
        "whether this objective decides n; on several, n keeps all of their targets"
    ),
    "objective.mean_from": "the true mean lies above this with a chance of 95 %, as believed",
    "objective.mean_to": "the true mean lies below this with a chance of 95 %, as believed",
    "objective.first_stage": (
        "results of a first stage, after which the number may be set anew; 60 % of the plain "
        "number unless given"
    ),
    **meanings(),
    # [[sigma]]
    "sigma": "where the standard deviation of single results comes from",
    "sigma.analyte": "the analyte it belongs to; may be left out where there is one",
    "sigma.stratum": "the stratum it belongs to; left out for the whole site",
    "sigma.part": (
        "the part of the spread that it covers; from a pilot with duplicates where one is named"
    ),
    "sigma.pilot": "file with pilot results, CSV or XLSX",
    "sigma.columns": "names of the pilot's columns: ours on the left, the file's on the right",
    "sigma.value": "standard deviation of single results, in the analyte's unit",
    "sigma.source": "where a typed value comes from; ASSUMED stamps every page",
    "sigma.from_results": "number of results behind a typed value, when it is known",
    "sigma.expected_mean": "the mean that is expected, in the analyte's unit",
    "sigma.skewness": "skewness of the population, where it is known",
    "sigma.excess_kurtosis": (
        "excess kurtosis of single results, where heavy tails are declared; 6 for an exponential "
        "shape"
    ),
    "sigma.correlation_between_visits": (
        "correlation of neighbouring visits to one place, as a longer series shows it; a mean is "
        "then sized by what such visits are worth"
    ),
    "sigma.correlation_days": (
        "days between the visits that the correlation belongs to, where planned ones differ"
    ),
    "sigma.visit_spacing_days": "days between the visits that are planned",
    # [[field_reading]]
    **{f"field_reading.{key}".rstrip("."): words for key, words in field_reading.MEANING.items()},
    # [cost]
    "cost": "what the campaign costs",
    "cost.currency": "currency of all amounts of money",
    "cost.mobilisation": "money for the campaign as such",
    "cost.per_location": "money for each location visited",
    "cost.per_sample": "money for each sample taken: its jar, its carriage",
    "cost.per_analysis": "money for each sample analysed",
    "cost.per_increment": "money for each increment of a composite, the walk to it included",
    "cost.per_ranking": "money for looking at one place to rank it",
    "cost.per_location_by_stratum": "money for a location by stratum, where it is not per_location",
    "cost.per_analysis_by_stratum": (
        "money for an analysis by stratum, where it is not per_analysis"
    ),
    "cost.per_crew_day": "money for each day of a crew in the field; a day begun counts whole",
    "cost.locations_per_day": "locations that a crew visits in a day",
    "cost.wrongly_acted": "money lost by acting although the true mean is not above the level",
    "cost.wrongly_left": "money lost by leaving the site alone although the true mean is above it",
    # [[qc]]
    "qc": "control samples, counted apart from n",
    "qc.kind": "the kind of control sample",
    "qc.share": "control samples as a share of the locations: 0.10 is one in ten",
    "qc.count": "number of control samples",
    "qc.source": "the document or the person that asks for them",
    # [loss]
    "loss": "locations that are expected to yield no result",
    "loss.share": "share of the locations that is expected to be lost",
    "loss.by_stratum": "the share by stratum, where strata differ",
    "loss.reason": "why losses are expected",
    # [rules]
    "rules": "what is fixed before any result is seen",
    "rules.non_detects": "how results below the reporting limit enter the mean",
    "rules.declared_shape": "the shape of the population that by-share may rely on",
    "rules.duplicates": "how a field duplicate meets its first sample",
    "rules.interval": "the interval that is reported",
    "rules.confidence": "the long-run share of intervals that hold the true mean",
    "rules.mean_interval": "how the ends of the interval are set about the mean",
    "rules.promised_class": "the class of populations that skew-widened keeps its confidence for",
    "rules.promised_for": "the class of populations that the confidence is declared for",
    "rules.single_result": "what is done with a stratum left with fewer than 2 results",
    "rules.fixed_by": "who fixed the rules",
    "rules.fixed_on": "the day on which the rules were fixed",
    # [field]
    "field": "what the crew needs to know that no map shows",
    "field.method": "the method or procedure that the crew follows",
    "field.position_accuracy_m": "metres within which the receiver finds a place",
    "field.offset_within_m": "metres by which a blocked location may move",
    "field.offset_rule": "how a blocked location moves, in words",
    "field.facts": "facts of the site that raise cautions",
    "field.ground_penetration": "whether anything is pushed, dug or drilled into the ground",
    "field.contact": "whom the crew calls",
    "field.laboratory": "the laboratory that receives the samples",
    "field.utc_offset": "offset of local time from UTC, such as +02:00",
    # [[clearance]]
    "clearance": "the reference that closes a hold point",
    "clearance.topic": "the hold point that it closes",
    "clearance.reference": "number of the ticket, letter or permit",
    "clearance.given_on": "the day on which it was given",
    "clearance.expires_on": "the last day on which it holds",
    # [draw]
    "draw": "what makes the draw repeatable",
    "draw.seed": "a whole number; the same seed draws the same locations",
    "draw.version": "version of the drawing procedure",
    # [paper]
    "paper": "printed pages",
    "paper.size": "size of the sheets",
}
"""Keys are ``table.key``, and ``table`` for a table as a whole."""

NOT_KNOWN: dict[str, str] = {
    "plan.site": "take the line out if it has no name",
    "plan.decision": "take the line out if none is known",
    "plan.decides": "take the line out if it is nobody in particular",
    "plan.prepared_by": "take the line out if it shall not be printed",
    "analyte.action_level": "if there is none, take this line and that of its source out",
    "analyte.action_level_source": "if there is no level, take this line and that of the level out",
    "frame.strata": 'if there are none, take the line out and write layout = "simple-random"',
    "frame.depth_top_m": "if it says nothing here, take the lines of the depth out",
    "frame.depth_bottom_m": "if it says nothing here, take the lines of the depth out",
    "sigma.from_results": 'if nobody knows, take the line out and write assurance = "plain"',
    "sigma.pilot": "if there is none, write value and source in its place",
}
"""What to do about a key that is still to fill in and that nobody can fill in."""
