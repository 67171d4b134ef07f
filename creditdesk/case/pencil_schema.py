"""Words for the tables of scenarios and studies in the schema of the exchange file."""

from collections.abc import Mapping

_KIND = "to: the value given; by: an amount added; by_pct: per cent of the figure as it stands added."
_STUDY = {
    "study": "Kind of the study.",
    "scenario": 'Name of the scenario it stands on; "": the figures as they stand.',
    "in_memo": "The memo prints it.",
}

PENCIL_TEXTS: Mapping[str, Mapping[str, str]] = {
    "Scenario": {
        "name": "Its own name, in one line.",
        "marks": "Pencil marks, at most one for each target; all are read at once, against the figures as they stand.",
        "assumptions": "Assumptions of the flow that differ from the house book's, by key: a number or a choice.",
        "event": 'Key of the stress event of the house book it answers; "": none.',
        "rationale": "Why its size is severe but plausible.",
        "judgement": "What a person says of an event that is not quantified.",
        "in_memo": "The memo prints it.",
    },
    "Mark": {
        "target": "A line item, a ratio of the house book, or a driver of its flow.",
        "kind": f"How the amount is meant. {_KIND}",
        "amount": "The amount: in the case's unit for a line, in its own unit for a ratio or driver, in per cent for"
        " by_pct.",
    },
    "Range": {
        "target": "A line item, a ratio of the house book, or a driver of its flow.",
        "kind": f"How low and high are meant. {_KIND}",
        "low": "Lower end, in the unit of kind.",
        "high": "Upper end, above low.",
    },
    "GridSpec": {
        **_STUDY,
        "across": "What moves from left to right.",
        "up": "What moves from bottom to top, another target.",
        "points": "Points along each side.",
    },
    "BreakEvenSpec": {
        **_STUDY,
        "along": "What moves, and how far it is looked.",
        "limits": "What may break, each looked for by itself.",
    },
    "Limit": {
        "kind": "grade: the final grade is worse than key; below, above: the amount or ratio of key passes at.",
        "key": "A grade, or the key of a line, sum or ratio.",
        "at": "The threshold of an amount or ratio.",
    },
    "ReachSpec": {
        **_STUDY,
        "grade": "The grade to be reached, after house rules.",
        "levers": "What may be moved, each target once.",
    },
    "Lever": {
        "range": "How far it may be moved.",
        "cost": "What one unit of it costs, against the other levers.",
        "step": "The step it moves in; 0: any amount.",
    },
    "SimulationSpec": {
        **_STUDY,
        "inputs": "What is uncertain, each target once.",
        "correlations": "Correlations of inputs; a pair that is not named has none.",
        "coefficients": "The fitted coefficients vary too, by the model's covariance.",
        "draws": "Number of draws.",
        "seed": "Start of the random numbers: the same seed gives the same draws.",
    },
    "UncertainInput": {
        "range": "Within what it varies.",
        "shape": "uniform: between low and high; normal: nine draws in ten within them; log_normal: the factor"
        " 1 + x/100 of by_pct, nine draws in ten within them.",
    },
    "Correlation": {
        "one": "Target of an input.",
        "other": "Target of another input.",
        "value": "Correlation of their normal scores.",
    },
}
"""Description of every field, by table."""
