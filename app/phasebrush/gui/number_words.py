"""Numbers in words: true minus signs, dashes for what is undefined, p that never reads as 0."""

from __future__ import annotations

import math


def fixed(value: float, decimals: int, *, sign: bool = False) -> str:
    """A number with a true minus sign; a dash where it is undefined."""
    if not math.isfinite(value):
        return "–"
    return f"{value:{'+' if sign else ''}.{decimals}f}".replace("-", "−")


def p_words(p: float) -> str:
    """A p-value that never reads as 0."""
    if not math.isfinite(p):
        return "–"
    if p < 1e-4:
        exponent = math.floor(math.log10(p)) if p > 1e-99 else -99
        raised = str(exponent + 1).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
        return f"< 10{raised}"
    return f"{p:.4f}" if p < 0.001 else f"{p:.3f}"
