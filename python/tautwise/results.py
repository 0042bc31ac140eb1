"""All results: frozen records that compare, pickle, print short, and turn into JSON and back without loss."""

from tautwise.places import Places
from tautwise.results_fit import FittedPoint, FittedPull, FittedSpan, SurveyFit
from tautwise.results_line import (
    CAUTION,
    Equilibrium,
    LowPoint,
    MarkState,
    SettleReport,
    SpanState,
    StrungState,
    SupportState,
)
from tautwise.results_sheet import CrewSection, CrewSheet, CrewSpan, CrewSupport, CrewTemperature, SpanReading
from tautwise.results_vet import FileVerdict, LimitState, VetReport
from tautwise.results_window import (
    Conflict,
    Price,
    PullToSpecify,
    PullWindow,
    Relaxation,
    UtilisationCurve,
    WindowEnd,
)

__all__ = [
    "CAUTION",
    "Conflict",
    "CrewSection",
    "CrewSheet",
    "CrewSpan",
    "CrewSupport",
    "CrewTemperature",
    "Equilibrium",
    "FileVerdict",
    "FittedPoint",
    "FittedPull",
    "FittedSpan",
    "LimitState",
    "LowPoint",
    "MarkState",
    "Places",
    "Price",
    "PullToSpecify",
    "PullWindow",
    "Relaxation",
    "SettleReport",
    "SpanReading",
    "SpanState",
    "StrungState",
    "SupportState",
    "SurveyFit",
    "UtilisationCurve",
    "VetReport",
    "WindowEnd",
]
