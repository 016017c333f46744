"""The files of a solved session: which there are, whether they may be written, and writing them."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import Any

from shadowscale.errors import ShadowscaleError, UsageError
from shadowscale.fit.plan import Plan
from shadowscale.jobs.painters import Painters
from shadowscale.session.atomic import write_bytes
from shadowscale.session.plain import to_plain
from shadowscale.session.session import Session
from shadowscale.session.store import save_session
from shadowscale.sheet import RENDERINGS, Sheet, light_curve, make_sheet, velocity_curve
from shadowscale.sheet.figures import FIGURES, FORMATS
from shadowscale.sheet.model_curve import model_curve

SESSION_FILE = "session.json"
LIGHT_FILE, VELOCITY_FILE = "light_curve.csv", "velocity_curve.csv"
MODEL_FILE = "model_curve.csv"
ODD = "backslashreplace"  # names of files may hold bytes that are no text
HTML_FILE, PDF_FILE, FIGURE_FOLDER = "report.html", "report.pdf", "figures"


def sheet_of(session: Session) -> Sheet:
    """The sheet of a solved session.

    Raises
    ------
    ValueError
        If it has no solution.
    """
    if session.solution is None or session.photometry is None:
        raise ValueError("the session is not solved")
    return make_sheet(
        session.solution,
        session.photometry,
        velocities=session.velocities,
        audit=session.audit,
        command=session.command,
        seed=session.plan.seed,
        versions=session.versions,
        plan=_wishes(session.plan),
    )


def _wishes(plan: Plan) -> dict[str, Any]:
    """What was wished, as plain values; a table of coefficients by its name."""
    table = None if plan.limb_table is None else Path(plan.limb_table).name
    found: dict[str, Any] = to_plain(replace(plan, limb_table=table))
    return found


def result_files(session: Session, *, report: bool = True) -> tuple[str, ...]:
    """The names of all files that `write_results` may write; figures that say nothing are left out."""
    curves = (LIGHT_FILE, VELOCITY_FILE) if session.velocity_sources else (LIGHT_FILE,)
    names = (*RENDERINGS, *curves, MODEL_FILE, SESSION_FILE)
    if not report:
        return names
    figures = [name for name in FIGURES if name != "velocities" or session.velocity_sources]
    drawn = (f"{FIGURE_FOLDER}/{name}.{kind}" for name in figures for kind in FORMATS)
    return (*names, HTML_FILE, PDF_FILE, *drawn)


def write_results(
    session: Session,
    folder: Path,
    *,
    overwrite: bool = False,
    report: bool = True,
    painters: Painters | None = None,
) -> tuple[Path, ...]:
    """Write everything a solved session gives; each file whole or not at all.

    Parameters
    ----------
    session : Session
    folder : Path
    overwrite : bool
        Replace files that are there.
    report : bool
        Write the report and the figures, too. They come last, so that trouble with them costs nothing else.
    painters : Painters or None
        Who make the report meanwhile; without them it is made here.

    Returns
    -------
    tuple of Path
        What was written.

    Raises
    ------
    UsageError
        A file is there already and `overwrite` is False, or is an input, or the folder cannot be
        written.
    ShadowscaleError
        The report could not be made; all other files are there.
    """
    check_targets(session, folder, result_files(session, report=report), overwrite=overwrite)
    sheet = sheet_of(session)
    finish = _begun(session, sheet, painters) if report else dict[str, bytes]
    contents = _contents(session, sheet)
    _write(folder, contents)
    try:
        save_session(replace(session, notes=()), folder / SESSION_FILE)
    except OSError as error:
        raise not_writable(folder, error) from error
    try:
        drawn = finish()
    except Exception as error:
        what = f"{type(error).__name__}: {error}"
        raise ShadowscaleError(
            f"the report could not be made ({what}); all other results are in {folder}"
        ) from error
    _write(folder, drawn)
    return tuple(folder / name for name in (*contents, SESSION_FILE, *drawn))


def _write(folder: Path, contents: Mapping[str, bytes]) -> None:
    try:
        for name, content in contents.items():
            write_bytes(folder / name, content)
    except OSError as error:
        raise not_writable(folder, error) from error


def _begun(
    session: Session, sheet: Sheet, painters: Painters | None
) -> Callable[[], dict[str, bytes]]:
    """Begin the report; what is returned ends it, and raises whatever went wrong from the beginning."""
    from shadowscale.jobs.reporting import made_here, report_of
    from shadowscale.sheet.report import make_document

    try:
        report = report_of(session, sheet)
        asked = report.shown, make_document(report)
        if painters is not None:
            painters.begin(*asked)
    except Exception as error:
        return partial(_raise, error)
    return lambda: _files(*(made_here(*asked) if painters is None else painters.finish()))


def _raise(error: Exception) -> dict[str, bytes]:
    raise error


def _files(
    figures: Mapping[str, Mapping[str, bytes]], page: bytes, pages: bytes
) -> dict[str, bytes]:
    """Report and figures by the names of their files."""
    found = {HTML_FILE: page, PDF_FILE: pages}
    for name, files in figures.items():
        found |= {f"{FIGURE_FOLDER}/{name}.{kind}": content for kind, content in files.items()}
    return found


def check_targets(session: Session, folder: Path, names: Iterable[str], *, overwrite: bool) -> None:
    """UsageError where a result would replace a file, unless `overwrite`; an input never may be."""
    sources = session.photometry_sources + session.velocity_sources
    inputs = [Path(source.path) for source in sources]
    if session.plan.limb_table is not None:
        inputs.append(Path(session.plan.limb_table))
    check_paths([folder / name for name in names], inputs=inputs, overwrite=overwrite)


def check_paths(
    paths: Iterable[Path], *, inputs: Iterable[Path], overwrite: bool, option: str = "--out"
) -> None:
    """UsageError where one of `paths` is there already, unless `overwrite`; an input never may be."""
    paths = list(paths)
    kept = {path.resolve() for path in inputs}
    for path in paths:
        if path.resolve() in kept:
            raise UsageError(option, str(path), expected="a folder without the input files")
        if path.is_dir() or (path.exists() and not overwrite):
            raise UsageError(
                option, f"{path}, which exists", expected="a free place, or --overwrite"
            )
    for folder in {path.parent for path in paths}:
        blocker = next((each for each in (folder, *folder.parents) if each.exists()), folder)
        if not blocker.is_dir():
            raise UsageError(option, str(folder), expected=f"a folder; {blocker} is a file")


def not_writable(folder: Path, error: OSError) -> UsageError:
    """What to say when the results cannot be written."""
    reason = error.strerror or str(error)
    return UsageError("--out", f"{folder} ({reason})", expected="a folder that can be written")


def _contents(session: Session, sheet: Sheet) -> dict[str, bytes]:
    """The content of each file but the session and the report."""
    solution, photometry = session.solution, session.photometry
    assert solution is not None
    assert photometry is not None
    texts = {name: rendered(sheet) for name, rendered in RENDERINGS.items()}
    texts[LIGHT_FILE] = light_curve(solution, photometry)
    if session.velocities is not None:
        texts[VELOCITY_FILE] = velocity_curve(solution, session.velocities)
    texts[MODEL_FILE] = model_curve(solution)
    return {name: text.encode("utf-8", ODD) for name, text in texts.items()}
