"""The sheet as JSON, the form that all others can be made from; `sheet.schema.json` describes it."""

from __future__ import annotations

import json
from collections.abc import Mapping
from importlib.resources import files
from math import isfinite
from typing import Any

import numpy as np

from shadowscale.geometry.contacts import ContactSolution, EclipseTiming
from shadowscale.sheet.file_names import file_names
from shadowscale.sheet.sheet import BandSheet, Entry, Provenance, Sheet

SCHEMA = 1


def as_json(sheet: Sheet) -> str:
    """The sheet as JSON text; what is not a finite number becomes null."""
    return json.dumps(document(sheet), indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def schema() -> dict[str, Any]:
    """The JSON schema that `sheet.json` follows."""
    text = files("shadowscale.sheet").joinpath("sheet.schema.json").read_text(encoding="utf-8")
    found: dict[str, Any] = json.loads(text)
    return found


def document(sheet: Sheet) -> dict[str, Any]:
    """The sheet as plain dictionaries and lists."""
    found = {
        "schema": SCHEMA,
        "quantities": _entries(sheet.quantities),
        "bands": {name: _band(band) for name, band in sheet.bands.items()},
        "sources": {name: _entries(entries) for name, entries in sheet.sources.items()},
        "correlations": {
            "names": list(sheet.correlation_names),
            "matrix": [list(row) for row in sheet.correlations],
        },
        "fit": dict(vars(sheet.fit)),
        "alternatives": [dict(vars(alternative)) for alternative in sheet.alternatives],
        "audit": [dict(vars(finding)) for finding in sheet.audit],
        "contact_solution": None if sheet.contact is None else _contact(sheet.contact),
        "decisions": [dict(vars(decision)) for decision in sheet.decisions],
        "notes": list(sheet.notes),
        "outliers": dict(sheet.outliers),
        "provenance": _provenance(sheet.provenance),
    }
    return {name: _finite(value) for name, value in found.items()}


def _entries(entries: Mapping[str, Entry]) -> dict[str, Any]:
    return {name: _entry(entry) for name, entry in entries.items()}


def _entry(entry: Entry) -> dict[str, Any]:
    estimate, quantity = entry.estimate, entry.quantity
    found: dict[str, Any] = {
        "value": estimate.value,
        "minus": estimate.minus,
        "plus": estimate.plus,
        "unit": quantity.unit,
        "how": estimate.how,
        "meaning": entry.meaning,
    }
    if entry.source:
        found["source"] = entry.source
    if estimate.prior is not None:
        found["prior"] = {"value": estimate.prior[0], "sigma": estimate.prior[1]}
    return found


def _band(band: BandSheet) -> dict[str, Any]:
    limb: dict[str, Any] = {"law": band.law}
    for star, entries in band.limb_darkening.items():
        limb[f"star{star}"] = _entries(entries)
    return {**_entries(band.quantities), "limb_darkening": limb, "rms": band.rms}


def _contact(contact: ContactSolution) -> dict[str, Any]:
    secondary = contact.secondary
    return {
        "values": dict(contact.values),
        "errors": dict(contact.errors),
        "primary": _timing(contact.primary),
        "secondary": None if secondary is None else _timing(secondary),
        "others": [dict(other) for other in contact.others],
        "notes": list(contact.notes),
    }


def _timing(timing: EclipseTiming) -> dict[str, Any]:
    names = ("middle", "duration", "ingress", "egress", "depth")
    found: dict[str, Any] = {name: getattr(timing, name) for name in names}
    variances = np.diag(timing.covariance).tolist()
    errors = [value**0.5 if value >= 0 else None for value in variances]
    return {**found, "flat": timing.flat, "errors": dict(zip(names, errors))}


def _provenance(provenance: Provenance) -> dict[str, Any]:
    names = file_names(file.path for file in provenance.inputs)
    return {
        "program": provenance.program,
        "versions": dict(provenance.versions),
        "inputs": [
            {
                "name": names[file.path],
                "sha256": file.sha256,
                "rows": file.rows,
                "used": file.used,
                "columns": dict(file.columns),
            }
            for file in provenance.inputs
        ],
        "command": provenance.command,
        "seed": provenance.seed,
        "time_scale": provenance.time_scale,
        "plan": dict(provenance.plan),
    }


def _finite(value: Any) -> Any:
    """The same with plain Python numbers, and null for what is not finite."""
    if isinstance(value, Mapping):
        return {str(name): _finite(item) for name, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [_finite(item) for item in value]
    if isinstance(value, (bool, np.bool_)):
        return bool(value)
    if isinstance(value, (int, np.integer)):
        return int(value)
    if isinstance(value, (float, np.floating)):
        return float(value) if isfinite(value) else None
    return value
