"""A front as a table for people and as rows for a spreadsheet."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from optim.cli.console import failures
from optim.cli.output import number, table
from optim.report.cautions import BANDS, CAUTION, CAUTION_FRONT, CAUTION_LIFT
from optim.report.units import as_read

Document = dict[str, Any]


def front_text(document: Document, kept: dict[str, float], run_file: Path) -> str:
    """Return the front as a table: the baseline first, then the best in the first objective.

    Parameters
    ----------
    document : dict
        As `optim.report.front.front_document` returns it.
    kept : dict
        Limit -> share of the evaluations that keep it; told where no design keeps them all.
    run_file : Path
        RUN.h5, for what to do next.
    """
    lines = [
        f"{document['study']}: {len(document['designs'])} designs on the front of "
        f"{document['evaluated']} evaluated; {document['feasible']} feasible, "
        f"{failures(document['failed'])}",
        f"hypervolume {number(document['hypervolume'], '.6g')} from {_reference(document)}",
        "",
    ]
    if document["baseline"] is not None:
        lines.append(_designs_table(document))
        lines += _notes(document, kept, run_file)
    lines += ["", CAUTION, CAUTION_FRONT]
    if any("cl_max" in one["name"] for one in document["objectives"] + document["constraints"]):
        lines.append(CAUTION_LIFT)
    return "\n".join(lines)


def _reference(document: Document) -> str:
    return ", ".join(
        f"{aim['name']} {as_read(document['reference_point'][aim['name']], aim['unit'])}"
        for aim in document["objectives"]
    )


def _designs_table(document: Document) -> str:
    aims, limits = document["objectives"], document["constraints"]
    head = ["", *[aim["name"] for aim in aims], *[limit["name"] for limit in limits]]
    wanted = [
        "wanted",
        *[aim["sense"] for aim in aims],
        *[f"{one['kind']} {as_read(one['limit'], one['unit'])}" for one in limits],
    ]
    rows = [_design_row("baseline", document["baseline"], document)]
    rows += [_design_row(f"#{one['id']}", one, document) for one in document["designs"]]
    return table(head, [wanted, *rows])


def _design_row(title: str, design: Document, document: Document) -> list[str]:
    better = "+" if _better_everywhere(design, document) else ""
    found = design["objectives"]
    return [
        f"{better}{title}",
        *[
            as_read(found[aim["name"]], aim["unit"]) + _width(design, aim)
            for aim in document["objectives"]
        ],
        *[
            _limit_cell(design["constraints"][limit["name"]], limit["unit"], _width(design, limit))
            for limit in document["constraints"]
        ],
    ]


def _limit_cell(one: Document, unit: str, width: str) -> str:
    margin = number(one["margin"], "+.2f")
    return f"{as_read(one['value'], unit)}{width} ({margin}{'*' if one['active'] else ''})"


def _width(design: Document, named: Document) -> str:
    """Return the half-width of the band of an objective or a limit, if it has one."""
    width = design["band"].get(named["name"])
    return "" if width is None else f" ±{as_read(float(f'{width:.2g}'), named['unit'])}"


def _better_everywhere(design: Document, document: Document) -> bool:
    base = document["baseline"]["objectives"]
    signs = {a["name"]: 1.0 if a["sense"] == "maximise" else -1.0 for a in document["objectives"]}
    return all(
        sign * (design["objectives"][name] - base[name]) > 0.0 for name, sign in signs.items()
    )


def _notes(document: Document, kept: dict[str, float], run_file: Path) -> list[str]:
    better = [one for one in document["designs"] if _better_everywhere(one, document)]
    notes = ["In brackets the margin to a limit over its scale: negative is missed, * is active."]
    if document["baseline"]["band"]:
        notes.append(BANDS)
    if better:
        notes.append(f"+ beats the baseline in every objective: {len(better)} designs.")
    if document["designs"]:
        one, name = document["designs"][0]["id"], next(iter(document["baseline"]["conditions"]))
        notes.append(f"Look at one with: sectionwright analyse {run_file}#{one} --condition {name}")
        notes.append(f"Build one with: sectionwright export {run_file}#{one} --output SECTION.dxf")
    else:
        shares = ", ".join(f"{name} {100.0 * share:.0f} %" for name, share in kept.items())
        notes.append(f"No design keeps every limit. Of the designs keep: {shares or 'no limits'}.")
    return notes


def front_rows(document: Document) -> list[Document]:
    """Return one flat row a design, the baseline first, with every number of the document."""
    if document["baseline"] is None:
        return []
    return [
        {"design": title} | _flat(design)
        for title, design in [
            ("baseline", document["baseline"]),
            *[(f"#{one['id']}", one) for one in document["designs"]],
        ]
    ]


def _flat(design: Document) -> Document:
    row: Document = {"id": design["id"], "generation": design["generation"]}
    row |= design["objectives"]
    row |= {f"band:{name}": design["band"].get(name) for name in design["objectives"]}
    for name, one in design["constraints"].items():
        row |= {f"limit:{name}": one["value"], f"margin:{name}": one["margin"]}
    row |= {f"variable:{name}": value for name, value in design["variables"].items()}
    for condition, point in design["conditions"].items():
        row |= flat_point(point, f"{condition}:")
    return row


def flat_point(point: Document, prefix: str = "") -> Document:
    """Return the fields of a point as cells: a bubble becomes its start and its end, and so on."""
    from optim.aerodynamics.accuracy import BANDED  # noqa: PLC0415  --help loads no numpy

    row: Document = {}
    for name, value in point.items():
        if name in {"bubble_upper", "bubble_lower"}:
            start, end = value or (None, None)
            row |= {f"{prefix}{name}_start": start, f"{prefix}{name}_end": end}
        elif name == "band":
            row |= {f"{prefix}band_{one}": (value or {}).get(one) for one in BANDED}
        elif name == "flags":
            row[f"{prefix}flags"] = " ".join(value)
        elif name != "surface":
            row[f"{prefix}{name}"] = value
    return row
