"""The last touches to a PDF before it is written: what the standards ask and the layout engine does not do.

PDF/A-3 (ISO 19005-3) and PDF/UA-1 (ISO 14289-1) in one file: the engine writes the first, the identifier of the
second is added to the metadata here, with the extension schema that PDF/A wants for it.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

_PROPERTY = (
    '<pdfaSchema:property><rdf:Seq><rdf:li rdf:parseType="Resource"><pdfaProperty:name>part</pdfaProperty:name>'
    "<pdfaProperty:valueType>Integer</pdfaProperty:valueType><pdfaProperty:category>internal</pdfaProperty:category>"
    "<pdfaProperty:description>Part of ISO 14289 that the file follows</pdfaProperty:description>"
    "</rdf:li></rdf:Seq></pdfaSchema:property>"
)
_SCHEMA = (
    '<rdf:li rdf:parseType="Resource"><pdfaSchema:schema>PDF/UA identification</pdfaSchema:schema>'
    "<pdfaSchema:namespaceURI>http://www.aiim.org/pdfua/ns/id/</pdfaSchema:namespaceURI>"
    f"<pdfaSchema:prefix>pdfuaid</pdfaSchema:prefix>{_PROPERTY}</rdf:li>"
)
UNIVERSAL_ACCESS = (
    '<rdf:Description rdf:about="" xmlns:pdfaExtension="http://www.aiim.org/pdfa/ns/extension/"'
    ' xmlns:pdfaSchema="http://www.aiim.org/pdfa/ns/schema#" xmlns:pdfaProperty="http://www.aiim.org/pdfa/ns/property#">'
    f"<pdfaExtension:schemas><rdf:Bag>{_SCHEMA}</rdf:Bag></pdfaExtension:schemas></rdf:Description>"
    '<rdf:Description rdf:about="" xmlns:pdfuaid="http://www.aiim.org/pdfua/ns/id/"><pdfuaid:part>1</pdfuaid:part></rdf:Description>'
).encode()
_END = b"</rdf:RDF>"
TYPES = {
    "yaml": "/application#2fyaml",
    "yml": "/application#2fyaml",
    "json": "/application#2fjson",
    "csv": "/text#2fcsv",
}


def finish(pdf: Any, destinations: Mapping[str, str]) -> None:
    """Complete a PDF in place; `destinations` says in words where a link to each place of the report leads."""
    _add_identifier(pdf)
    if "AF" in pdf.catalog:
        # An attachment must be named once; the engine names it twice, as a file and as an associated file.
        pdf.catalog["AF"][:] = list(dict.fromkeys(pdf.catalog["AF"]))
    for item in pdf.objects:
        if not isinstance(item, dict):
            continue
        if item.get("Type") == "/Filespec":
            # The engine guesses the type by tables that differ between versions of Python.
            suffix = item["UF"].string.rpartition(".")[2]
            embedded = pdf.objects[int(item["EF"]["F"].split()[0])]
            embedded.extra["Subtype"] = TYPES.get(suffix, "/application#2foctet-stream")
        elif item.get("Subtype") == "/Link" and "Dest" in item:
            item["Contents"].string = destinations.get(item["Dest"].string, "elsewhere in this report")
    pdf.catalog["PageMode"] = "/UseOutlines"


def _add_identifier(pdf: Any) -> None:
    metadata = pdf.objects[int(pdf.catalog["Metadata"].split()[0])]
    packet = b"".join(part if isinstance(part, bytes) else part.encode() for part in metadata.stream)
    if packet.count(_END) != 1:
        raise ValueError("the metadata of the PDF are not as expected")
    metadata.stream = [packet.replace(_END, UNIVERSAL_ACCESS + _END)]
    metadata.compress = False
