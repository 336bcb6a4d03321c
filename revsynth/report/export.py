"""PNG and PDF from an SVG picture, through well-kept libraries that need no system package."""

from __future__ import annotations

import io
import re

from revsynth.errors import UsageError

MOST_PIXELS = 60_000_000
"""The largest PNG: about a quarter of a gigabyte while it is made."""
LONGEST_PAGE = 19_200
"""The longest side of a PDF page, in units of 1/96 inch (ISO 32000-1, annex C: 14,400 of 1/72 inch)."""


def svg_to_pdf(svg: str) -> bytes:
    """One PDF page of the picture's size; the same picture gives the same bytes.

    Raises UsageError for a picture longer than a page may be.
    """
    width, height = _size(svg)
    if max(width, height) > LONGEST_PAGE:
        raise UsageError(
            f"the picture is {width:,} x {height:,} units and a PDF page ends at {LONGEST_PAGE:,}: write .svg"
        )
    return _pdf(svg)


def _size(svg: str) -> tuple[int, int]:
    """Width and height as the picture itself says them."""
    found = re.search(r'width="(\d+)" height="(\d+)"', svg)
    if found is None:
        raise ValueError("the picture does not say how large it is")
    return int(found[1]), int(found[2])


def _pdf(svg: str) -> bytes:
    from reportlab import rl_config
    from reportlab.graphics import renderPDF
    from svglib.svglib import svg2rlg

    rl_config.invariant = 1
    drawing = svg2rlg(io.StringIO(svg))
    if drawing is None:
        raise ValueError("the picture could not be read as SVG")
    data: bytes = renderPDF.drawToString(drawing)
    return data


def svg_to_png(svg: str, scale: float = 2.0) -> bytes:
    """The picture as PNG, `scale` pixels a unit on white; raises UsageError beyond MOST_PIXELS."""
    width, height = _size(svg)
    if width * height * scale * scale > MOST_PIXELS:
        raise UsageError(
            f"the picture is {width:,} x {height:,} units, too large for a PNG of {MOST_PIXELS:,} pixels: "
            "write .svg"
        )
    import pypdfium2

    page = pypdfium2.PdfDocument(_pdf(svg))[0]
    # PDF units are 1/72 inch, the picture's are 1/96: undo what the conversion took.
    image = page.render(scale=scale * 96 / 72).to_pil()
    stream = io.BytesIO()
    image.save(stream, format="PNG")
    return stream.getvalue()
