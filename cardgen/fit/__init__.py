"""Fit: evidence, priors, least squares, covariance, tolerances."""

from cardgen.fit.estimate import Estimate, estimate
from cardgen.fit.evidence import QUANTITIES, Evidence, Reading, standard_deviations
from cardgen.fit.knowledge import (
    EvidenceRange,
    Knowledge,
    carried_over,
    evidence_range,
    knowledge_from_fit,
    knowledge_from_profile,
)
from cardgen.fit.model import Subject, cruise_of_rows, mixture_of_rows, predict
from cardgen.fit.parameters import (
    FUEL_SCALE_PREFIX,
    PARTS,
    Parameter,
    Part,
    applied,
    parameters,
    prior_covariance,
    prior_mean,
)
from cardgen.fit.tolerance import tolerances

__all__ = [
    "FUEL_SCALE_PREFIX",
    "PARTS",
    "QUANTITIES",
    "Estimate",
    "Evidence",
    "EvidenceRange",
    "Knowledge",
    "Parameter",
    "Part",
    "Reading",
    "Subject",
    "applied",
    "carried_over",
    "cruise_of_rows",
    "estimate",
    "evidence_range",
    "knowledge_from_fit",
    "knowledge_from_profile",
    "mixture_of_rows",
    "parameters",
    "predict",
    "prior_covariance",
    "prior_mean",
    "standard_deviations",
    "tolerances",
]
