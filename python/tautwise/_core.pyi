"""The C core as Python sees it: SI, angles in rad, temperatures in degC. Use the package's own functions instead."""

from typing import Any

import numpy as np

DEFAULTS: dict[str, float | int | bool]
NLOPT_VERSION: str
STATUS: dict[str, str]

class RangeError(ValueError):
    path: str
    expected: str

class SettleError(RuntimeError):
    status: str

class Project:
    def __new__(cls, problem: dict[str, Any]) -> Project: ...
    def string(self, *, pull: float | None = None) -> dict[str, Any]: ...
    def settle(self, condition: int, *, pull: float | None = None, **options: Any) -> dict[str, Any]: ...
    def shape(self, condition: int, points: int = 200, *, pull: float | None = None) -> dict[str, Any]: ...
    def at(self, condition: int, stations: Any, *, pull: float | None = None) -> dict[str, Any]: ...
    def course(self, condition: int, *, pull: float | None = None) -> Any: ...
    def judge(self, *, pull: float | None = None, **options: Any) -> list[dict[str, Any]]: ...
    def window(self, **options: Any) -> dict[str, Any]: ...

settle_spans: np.ufunc
natural_length: np.ufunc
