"""PNG and PDF from an SVG picture, through well-kept libraries that need no system package."""

from __future__ import annotations

import io


def svg_to_pdf(svg: str) -> bytes:
    """One PDF page of the picture's size; the same picture gives the same bytes."""
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
    """The picture as PNG, `scale` pixels a unit on white."""
    import pypdfium2

    page = pypdfium2.PdfDocument(svg_to_pdf(svg))[0]
    # PDF units are 1/72 inch, the picture's are 1/96: undo what the conversion took.
    image = page.render(scale=scale * 96 / 72).to_pil()
    stream = io.BytesIO()
    image.save(stream, format="PNG")
    return stream.getvalue()
