"""What ``tautwise fit`` prints for people: the pull or the lengths, the points farthest off, and the table to paste."""

from __future__ import annotations

from typing import TYPE_CHECKING

from tautwise.columns import plural
from tautwise.fit_judge import NO_FIT
from tautwise.results_fit import SurveyFit, fitted_table, point_table, pull_words
from tautwise.strict import shown
from tautwise.text import Ink, caution, heading, next_steps, quoted

if TYPE_CHECKING:
    from tautwise.model import Project

POINTS_SHOWN = 12


def fit_text(
    found: SurveyFit, project: Project, ink: Ink, written: str | None = None, temperature: str | None = None
) -> list[str]:
    """The fitted line.

    Parameters
    ----------
    written: the project file as built, where it was written. temperature: as the command was given it.
    """
    answer = pull_words(found)
    sure = f" ({100 * found.confidence:.0f} %)" if found.factor is not None else ""
    lines = heading(project, ink)
    if found.survey:
        lines.insert(-1, shown(found.survey, 200))
    doubts = [text for text in found.warnings if text.startswith(NO_FIT)]
    lines += [ink.alarm(f"{text[:1].upper()}{text[1:]}") for text in doubts]
    lines += [ink.strong(f"{answer[:1].upper()}{answer[1:]}{sure}") + f", bare line at {_degrees(found)}", ""]
    lines += [*_off_lines(found), "", *fitted_table(found).lines(), "", *_point_lines(found, ink)]
    if written:
        steps = [("judge every limit on the line as built", f"tautwise vet {quoted(written)}")]
        return [*lines, *next_steps(steps, ink), *caution(found.caution, ink)]
    lines += ["", ink.strong("To put in place of the project's own [stringing], bare line in still air")]
    lines += [f"  {line}" for line in found.paste().splitlines()]
    file, survey = quoted(project.source or "FILE"), quoted(found.survey or "SURVEY")
    given = f" --unknown {found.unknown}" if found.unknown != "pull" else ""
    given += f" --temperature {quoted(temperature)}" if temperature is not None else ""
    steps = [("write the project as built", f"tautwise fit {file} {survey}{given} --write NAME.taut.toml")]
    return [*lines, *next_steps(steps, ink), *caution(found.caution, ink)]


def _degrees(found: SurveyFit) -> str:
    return f"{found.temperature_degC:.4g} degC"


def _off_lines(found: SurveyFit) -> list[str]:
    low, high = found.temperatures_degC[0], found.temperatures_degC[-1]
    warm = f"at {low:.4g} degC" if low == high else f"at {low:.4g} to {high:.4g} degC"
    count = f"{plural(found.measurements, 'measurement')} for {plural(found.unknowns, 'unknown')}"
    lines = [
        f"{plural(len(found.points), 'point')} {warm}, {count}; "
        f"they lie {1e3 * found.rms_m:.1f} mm off the line (root mean square)."
    ]
    if found.factor is None:
        lines.append("Nothing is left over to tell how sure that is.")
    elif found.sigmas_given:
        left = found.measurements - found.unknowns
        lines.append(
            f"Intervals by the sigmas given; squares over sigma squared sum to {found.chi2:.1f}, expected {left}."
        )
    else:
        sigma = 1e3 * (found.standard_deviation_m or 0.0)
        sure = f"intervals are {found.factor:.2f} standard errors to either side"
        lines.append(f"One measurement is good to {sigma:.1f} mm (standard deviation); {sure}.")
    return lines


def _point_lines(found: SurveyFit, ink: Ink) -> list[str]:
    ranked = found.ranked()
    lines = [ink.strong("Points, farthest off first"), *point_table(ranked[:POINTS_SHOWN]).lines()]
    more = len(ranked) - POINTS_SHOWN
    return [*lines, f"  ... and {plural(more, 'more point')}, closer"] if more > 0 else lines
