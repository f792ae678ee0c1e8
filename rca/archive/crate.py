"""The run as an RO-Crate 1.1 with terms of W3C PROV: what was used, by what, what came of it.

Specifications: RO-Crate 1.1; Process Run Crate 0.5; PROV-O (W3C Recommendation 2013).
"""

from collections.abc import Mapping
from typing import Any
from urllib.parse import quote

SPECIFICATION = "https://w3id.org/ro/crate/1.1"
PROFILE = "https://w3id.org/ro/wfrun/process/0.5"
PROV = "http://www.w3.org/ns/prov#"
TERMS = ("used", "wasGeneratedBy", "wasAssociatedWith", "wasDerivedFrom", "hadPlan")
CONTEXT = [
    f"{SPECIFICATION}/context",
    {
        "prov": PROV,
        "sha256": "https://w3id.org/ro/terms/workflow-run#sha256",
        **{term: {"@id": f"{PROV}{term}", "@type": "@id"} for term in TERMS},
    },
]
RUN = "#run"
PROGRAM = "#rca"
MEDIA = {
    "csv": "text/csv",
    "html": "text/html",
    "ipynb": "application/x-ipynb+json",
    "jpg": "image/jpeg",
    "json": "application/json",
    "md": "text/markdown",
    "npz": "application/zip",
    "parquet": "application/vnd.apache.parquet",
    "pdf": "application/pdf",
    "png": "image/png",
    "svg": "image/svg+xml",
    "toml": "application/toml",
    "ttf": "font/ttf",
    "txt": "text/plain",
    "xlsx": "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet",
}

Entity = dict[str, Any]


def crate(
    record: Mapping[str, Any],
    *,
    title: str = "",
    report: str = "",
    case: str | None = None,
    others: Mapping[str, Mapping[str, Any]] | None = None,
) -> Entity:
    """RO-Crate metadata of a run from its sealed record.

    ``report`` and ``case`` are the folders of report and evidence below the crate's root, with a
    final slash; with ``case`` None the evidence is described but is no part of the crate.
    ``others`` are further files of the crate, by path, with bytes and sha256.
    """
    results = [
        _file(report + name, one) | {"wasGeneratedBy": _ref(RUN)}
        for name, one in sorted(record["files"].items())
    ]
    results.append(
        {
            "@id": quote(f"{report}record.json"),
            "@type": "File",
            "name": "record.json",
            "encodingFormat": "application/json",
            "description": "The run record this description is made from.",
            "wasGeneratedBy": _ref(RUN),
        }
    )
    inputs = [_input(one, case) for one in record["input_files"]]
    further = [_file(name, one) for name, one in sorted((others or {}).items())]
    parts = [*results, *(inputs if case is not None else ()), *further]
    return {
        "@context": CONTEXT,
        "@graph": [
            _descriptor(),
            _root(record, title, parts),
            *_run(record, inputs, results),
            *parts,
            *(inputs if case is None else ()),
        ],
    }


def _descriptor() -> Entity:
    return {
        "@id": "ro-crate-metadata.json",
        "@type": "CreativeWork",
        "conformsTo": _ref(SPECIFICATION),
        "about": _ref("./"),
    }


def _root(record: Mapping[str, Any], title: str, parts: list[Entity]) -> Entity:
    return {
        "@id": "./",
        "@type": "Dataset",
        "name": title or "Failure investigation report of a hydraulic pump",
        "description": "Evidence file, executed notebooks, results and report of one case, with "
        "the record of the run that made them.",
        "datePublished": record["ended"],
        "license": "The owner of the evidence decides on copies; the report may be copied in full "
        "only.",
        "conformsTo": _ref(PROFILE),
        "hasPart": [_ref(part["@id"]) for part in parts],
        "mentions": _ref(RUN),
    }


def _run(record: Mapping[str, Any], inputs: list[Entity], results: list[Entity]) -> list[Entity]:
    people = [
        {"@id": f"#{role}", "@type": ["Person", "prov:Agent"], "name": record["agent"][role]}
        for role in ("investigator", "reviewer")
        if record["agent"].get(role)
    ]
    run: Entity = {
        "@id": RUN,
        "@type": ["CreateAction", "prov:Activity"],
        "name": "Run of the investigation's notebooks and layout of the report",
        "startTime": record["started"],
        "endTime": record["ended"],
        "actionStatus": _ref("http://schema.org/CompletedActionStatus"),
        "instrument": _ref(PROGRAM),
        "object": [_ref(one["@id"]) for one in inputs],
        "result": [_ref(one["@id"]) for one in results],
        "used": [one["@id"] for one in inputs],
        "wasAssociatedWith": [PROGRAM, *(one["@id"] for one in people)],
        "hadPlan": [f"#notebook/{quote(name)}" for name in sorted(record["notebooks"])],
    }
    if people:
        run["agent"] = _ref(people[0]["@id"])
    program: Entity = {
        "@id": PROGRAM,
        "@type": ["SoftwareApplication", "prov:SoftwareAgent"],
        "name": "rca",
        "softwareVersion": record["versions"]["rca"],
        "sha256": record["code"],
        "softwareRequirements": [
            f"{name} {number}" for name, number in sorted(record["versions"].items())
        ],
    }
    knowledge: Entity = {
        "@id": "#knowledge",
        "@type": ["CreativeWork", "prov:Entity"],
        "name": "Knowledge the verdict was weighed with",
        "version": record["knowledge"],
    }
    plans = [
        {
            "@id": f"#notebook/{quote(name)}",
            "@type": ["SoftwareSourceCode", "prov:Plan"],
            "name": name,
            "sha256": digest.split(" ")[0],
        }
        for name, digest in sorted(record["notebooks"].items())
    ]
    run["used"] = [*run["used"], knowledge["@id"]]
    return [run, program, knowledge, *plans, *people]


def _file(path: str, one: Mapping[str, Any]) -> Entity:
    return {
        "@id": quote(path),
        "@type": "File",
        "name": path.rsplit("/", 1)[-1],
        "contentSize": str(one["bytes"]),
        "sha256": one["sha256"],
        "encodingFormat": _media(path),
    }


def _input(one: Mapping[str, Any], case: str | None) -> Entity:
    entity = _file((case or "") + one["file"], one)
    entity |= {"name": one["file"], "additionalType": one["role"]}
    if case is None:
        entity |= {"@id": f"#input/{quote(one['file'])}", "@type": "CreativeWork"}
    return entity


def _media(path: str) -> str:
    return MEDIA.get(path.rsplit(".", 1)[-1].lower(), "application/octet-stream")


def _ref(name: str) -> dict[str, str]:
    return {"@id": name}
