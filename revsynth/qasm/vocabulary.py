"""The words that OpenQASM 2 and 3 keep for themselves.

Sources: A. Cross et al., "Open Quantum Assembly Language", 2017 (arXiv 1707.03429), appendix A and figure 2
(qelib1.inc); the OpenQASM 3 standard, lexical rules, built-in functions and standard library (stdgates.inc).
"""

from __future__ import annotations


def _words(text: str) -> frozenset[str]:
    return frozenset(text.split())


KEYWORDS_2 = _words(
    "OPENQASM include qreg creg gate opaque measure reset barrier if U CX pi sin cos tan exp ln sqrt"
)
"""Reserved in OpenQASM 2."""

TYPES_3 = _words("int uint float angle bool bit complex duration stretch array")
"""Type names of OpenQASM 3."""

STATEMENTS_3 = _words("""
    OPENQASM include defcalgrammar def cal defcal gate extern box let break continue if else end return for
    while in switch case default input output const readonly mutable qreg qubit creg void gphase inv pow ctrl
    negctrl durationof delay reset measure barrier pragma true false im
    """)
"""Keywords of OpenQASM 3 other than types."""

KEYWORDS_3 = TYPES_3 | STATEMENTS_3
"""What no name may be in OpenQASM 3."""

CONSTANTS = _words("pi tau euler π τ ℇ")
"""The built-in constants."""

FUNCTIONS_3 = _words("""
    arccos arcsin arctan ceiling cos exp floor log mod popcount pow real imag rotl rotr sin sqrt tan sizeof
    """)
"""The built-in functions of OpenQASM 3."""

FUNCTIONS_2 = _words("sin cos tan exp ln sqrt")
"""The functions of OpenQASM 2."""

STDGATES = _words("""
    p x y z h s sdg t tdg sx rx ry rz cx cy cz cp crx cry crz ch swap ccx cswap cu
    CX phase cphase id u1 u2 u3
    """)
"""The gates of stdgates.inc, OpenQASM 3."""

QELIB1 = _words("u3 u2 u1 cx id x y z h s sdg t tdg rx ry rz cz cy ch ccx crz cu1 cu3")
"""The gates of qelib1.inc as published with OpenQASM 2."""

QELIB1_LATER = _words("""
    u0 u p sx sxdg swap cswap crx cry cp csx cu rxx rzz rccx rc3x c3x c3sqrtx c4x
    """)
"""Gates that later copies of qelib1.inc add (common practice); a file may define them itself."""

OURS = ("work", "mark", "seen", "line", "keep", "enable", "lent", "q")
"""Register names that carry a meaning in the files that revsynth writes."""

RESERVED = (
    KEYWORDS_2
    | KEYWORDS_3
    | {"opaque", "pi", "tau", "euler", "U", "CX"}
    | FUNCTIONS_2
    | FUNCTIONS_3
    | STDGATES
    | QELIB1
    | QELIB1_LATER
)
"""What a register that is to be read as either version must not be called."""

VERSION_3_ONLY = _words(
    "qubit bit let for ctrl negctrl inv pow gphase else const extern def box delay while switch"
)
"""Words that give a statement of OpenQASM 3 away in a file of OpenQASM 2."""
