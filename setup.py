"""Builds the extension tautwise._core from csrc/ against the system's NLopt. Everything else is in pyproject.toml.

TAUTWISE_WERROR=1    turns warnings into errors (the test command sets it).
TAUTWISE_SANITIZE=1  builds with the address and undefined-behaviour sanitizers.
"""

from __future__ import annotations

import os
import shlex
import subprocess
import sysconfig
from collections.abc import Callable
from multiprocessing.pool import ThreadPool
from pathlib import Path
from typing import Any

from setuptools import Extension, setup
from setuptools.command.build_ext import build_ext

FOLDERS = ("csrc/core", "csrc/search", "csrc/binding")
NLOPT = "nlopt >= 2.7.1"
NLOPT_IS_MISSING = f"""
Tautwise builds against the C library {NLOPT}, found through pkg-config. One of these lines brings both:
    apt-get install libnlopt-dev pkg-config
    brew install nlopt pkg-config
    conda install -c conda-forge nlopt pkg-config
"""

FLAGS = [
    "-std=c11",
    "-O2",
    "-ffp-contract=off",
    "-fvisibility=hidden",
    "-Wall",
    "-Wextra",
    "-Wpedantic",
    "-Wshadow",
    "-Wconversion",
    "-Wstrict-prototypes",
    "-Wmissing-prototypes",
]
# Python's slots hold functions in void pointers, which ISO C does not allow.
BINDING_FLAGS = ["-Wno-pedantic"]
SANITIZE = [
    "-fsanitize=address,undefined",
    "-fno-sanitize-recover=undefined",
    "-fno-omit-frame-pointer",
    "-U_FORTIFY_SOURCE",
]


def nlopt_flags(what: str) -> list[str]:
    """Ask pkg-config for NLopt's "--cflags" or "--libs"."""
    try:
        answer = subprocess.run(["pkg-config", what, NLOPT], capture_output=True, text=True, check=True)
    except (OSError, subprocess.CalledProcessError):
        raise SystemExit(NLOPT_IS_MISSING) from None
    return shlex.split(answer.stdout)


def system_include_flags() -> list[str]:
    """Python's and NumPy's headers as system headers, so that our warnings stay out of them."""
    import numpy

    folders = {sysconfig.get_path("include"), sysconfig.get_path("platinclude"), numpy.get_include()}
    return [flag for folder in sorted(folders) for flag in ("-isystem", folder)]


def side_by_side(compile_all: Callable[..., list[str]]) -> Callable[..., list[str]]:
    """Compile the sources on every core, the binding's with its own flags."""

    def compile_one(source: str, options: dict[str, Any]) -> list[str]:
        if Path(source).parent.name == "binding":
            options = options | {"extra_postargs": [*options["extra_postargs"], *BINDING_FLAGS]}
        return compile_all([source], **options)

    def compile_each(sources: list[str], **options: Any) -> list[str]:
        with ThreadPool(os.cpu_count()) as pool:
            objects = pool.starmap(compile_one, [(source, options) for source in sources])
        return [name for names in objects for name in names]

    return compile_each


class BuildCore(build_ext):
    """Looks for NLopt and NumPy only when something is built, so that metadata need neither."""

    def build_extensions(self) -> None:
        flags = [*FLAGS, *system_include_flags(), *nlopt_flags("--cflags")]
        libs = [*nlopt_flags("--libs"), "-lm"]
        if os.environ.get("TAUTWISE_WERROR") == "1":
            flags.append("-Werror")
        if os.environ.get("TAUTWISE_SANITIZE") == "1":
            flags += SANITIZE
            libs += SANITIZE[:1]
        for extension in self.extensions:
            extension.extra_compile_args = flags
            extension.extra_link_args = libs
        self.compiler.compile = side_by_side(self.compiler.compile)
        super().build_extensions()


def sources(ending: str) -> list[str]:
    here = Path(__file__).parent
    return sorted(str(file.relative_to(here)) for folder in FOLDERS for file in (here / folder).glob(ending))


core = Extension("tautwise._core", sources("*.c"), include_dirs=list(FOLDERS), depends=[*sources("*.h"), "setup.py"])
setup(ext_modules=[core], cmdclass={"build_ext": BuildCore})
