"""Tautwise designs how hard to pull a line and where to hold it up.

Names are loaded when they are first used, so that importing the package costs little.

>>> import tautwise as tw
>>> states = tw.settle_spans(span=300.0, rise=0.0, natural_length=300.8, stiffness=34.7e6, weight=15.97)
>>> round(float(states.sag), 6)
10.355174
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from tautwise.catalogue import sizes
    from tautwise.errors import (
        Fault,
        InputError,
        NotSettledError,
        SearchCancelled,
        ShutWindowError,
        TautwiseError,
    )
    from tautwise.kernel import SpanStates, natural_length, settle_spans
    from tautwise.model import Project, load
    from tautwise.results import (
        CrewSheet,
        Equilibrium,
        LimitState,
        MarkState,
        PullWindow,
        SettleReport,
        SpanState,
        SupportState,
        SurveyFit,
        VetReport,
    )
    from tautwise.rulepacks import RulePack, rule_packs
    from tautwise.size_records import Size
    from tautwise.survey import Survey, read_survey

    __version__: str

_HOMES = {
    "catalogue": ("sizes",),
    "errors": (
        "Fault",
        "InputError",
        "NotSettledError",
        "SearchCancelled",
        "ShutWindowError",
        "TautwiseError",
    ),
    "kernel": ("SpanStates", "natural_length", "settle_spans"),
    "model": ("Project", "load"),
    "results": (
        "CrewSheet",
        "Equilibrium",
        "LimitState",
        "MarkState",
        "PullWindow",
        "SettleReport",
        "SpanState",
        "SupportState",
        "SurveyFit",
        "VetReport",
    ),
    "survey": ("Survey", "read_survey"),
    "rulepacks": ("RulePack", "rule_packs"),
    "size_records": ("Size",),
}
_HOME_OF = {name: module for module, names in _HOMES.items() for name in names}

__all__ = [
    "CrewSheet",
    "Equilibrium",
    "Fault",
    "InputError",
    "LimitState",
    "MarkState",
    "NotSettledError",
    "Project",
    "PullWindow",
    "RulePack",
    "SearchCancelled",
    "SettleReport",
    "ShutWindowError",
    "Size",
    "SpanState",
    "SpanStates",
    "SupportState",
    "Survey",
    "SurveyFit",
    "TautwiseError",
    "VetReport",
    "__version__",
    "load",
    "natural_length",
    "read_survey",
    "rule_packs",
    "settle_spans",
    "sizes",
]


def __getattr__(name: str) -> Any:
    if name == "__version__":
        from importlib.metadata import PackageNotFoundError, version

        try:
            value: Any = version("tautwise")
        except PackageNotFoundError:  # run from a source tree that was never installed
            value = "0+unknown"
    elif name in _HOME_OF:
        value = getattr(import_module(f"tautwise.{_HOME_OF[name]}"), name)
    else:
        raise AttributeError(f"module 'tautwise' has no attribute {name!r}")
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})
