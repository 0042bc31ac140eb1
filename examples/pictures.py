"""Draws every project file here: the settled line and the window, as PNG files in out/."""

from __future__ import annotations

from pathlib import Path

import matplotlib

matplotlib.use("Agg")

import matplotlib.pyplot as plt

import tautwise as tw
from tautwise.figure import plot_line, plot_window

HERE = Path(__file__).resolve().parent
OUT = HERE / "out"


def draw(file: Path) -> list[Path]:
    """The pictures of one project; a file without a stringing rule is drawn at the pull to specify."""
    project = tw.load(file)
    window = project.window()
    pull = window.specify.horizontal_tension_N if window.specify else None
    stem = file.name.removesuffix(".taut.toml")
    lines = [line for line in project.settle_all(pull=pull) if line.settled]
    pictures = {f"{stem}_line.png": plot_line(lines), f"{stem}_window.png": plot_window(window)}
    for name, ax in pictures.items():
        ax.figure.savefig(OUT / name, dpi=120)
        plt.close(ax.figure)
    survey = file.with_name(f"{stem}_survey.csv")
    if survey.exists():
        pictures[f"{stem}_fit.png"] = draw_fit(project, survey, OUT / f"{stem}_fit.png")
    return [OUT / name for name in pictures]


def draw_fit(project: tw.Project, survey: Path, picture: Path) -> object:
    """The picture of the line that fits a survey."""
    ax = project.fit(survey).plot()
    ax.figure.savefig(picture, dpi=120)
    plt.close(ax.figure)
    return ax


def main() -> None:
    OUT.mkdir(exist_ok=True)
    for file in sorted(HERE.glob("*.taut.toml")):
        for picture in draw(file):
            print(picture.relative_to(HERE.parent))


if __name__ == "__main__":
    main()
