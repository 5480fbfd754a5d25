"""The fonts that the PDF is set in: those that ship with specgate, and no other that a machine may have."""

from __future__ import annotations

import os
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache
from importlib.resources import as_file, files
from io import BytesIO
from pathlib import Path
from xml.sax.saxutils import escape

_CONFIGURATION = """<?xml version="1.0"?><!DOCTYPE fontconfig SYSTEM "urn:fontconfig:fonts.dtd">
<fontconfig><dir>{fonts}</dir><cachedir>{cache}</cachedir>
<alias binding="same"><family>sans-serif</family><prefer><family>DejaVu Sans</family></prefer></alias>
<alias binding="same"><family>monospace</family><prefer><family>DejaVu Sans Mono</family></prefer></alias></fontconfig>
"""


@contextmanager
def only_ours() -> Iterator[None]:
    """Let font lookup see nothing but the shipped fonts while the body runs.

    Without it a character that a font lacks is taken from whatever the machine has, and bytes differ between machines.
    """
    before = os.environ.get("FONTCONFIG_FILE")
    with as_file(files("specgate.templates").joinpath("fonts")) as fonts, tempfile.TemporaryDirectory() as scratch:
        configuration = Path(scratch) / "fonts.conf"
        configuration.write_text(_CONFIGURATION.format(fonts=escape(str(fonts)), cache=escape(scratch)))
        os.environ["FONTCONFIG_FILE"] = str(configuration)
        try:
            yield
        finally:
            if before is None:
                del os.environ["FONTCONFIG_FILE"]
            else:
                os.environ["FONTCONFIG_FILE"] = before


@cache
def characters() -> frozenset[str]:
    """Return the characters that every shipped face can show, by itself or through the regular one."""
    from fontTools.ttLib import TTFont  # type: ignore[import-untyped]

    data = files("specgate.templates").joinpath("fonts", "DejaVuSans.ttf").read_bytes()
    with TTFont(BytesIO(data), lazy=True) as font:
        return frozenset(map(chr, font.getBestCmap()))
