"""Statements of OpenQASM 2 and 3, one at a time, from tokens.

What belongs to one version only is refused in the other, with the reason; so is every part of the language
that a circuit of gates, measurements and conditions cannot hold (timing, subroutines, classical variables).
"""

from __future__ import annotations

from revsynth.errors import CircuitFileError
from revsynth.qasm.declarations import DeclarationParser
from revsynth.qasm.expressions import ExpressionParser
from revsynth.qasm.lexer import Lexer, Token, shown
from revsynth.qasm.syntax import (
    Barrier,
    Block,
    Branch,
    Declaration,
    Expression,
    GateCall,
    Loop,
    Measurement,
    Modifier,
    Operand,
    Reset,
    Selector,
    Span,
    Statement,
    VersionNumber,
)
from revsynth.qasm.vocabulary import KEYWORDS_2, KEYWORDS_3, VERSION_3_ONLY

_MAX_DEPTH = 40
_MODIFIERS = ("ctrl", "negctrl", "inv", "pow")
_REFUSED = {
    "def": "subroutines are not read: write a gate",
    "extern": "external functions cannot be read as a circuit",
    "defcal": "pulse definitions cannot be read as a circuit",
    "defcalgrammar": "pulse definitions cannot be read as a circuit",
    "cal": "pulse definitions cannot be read as a circuit",
    "while": "a 'while' loop has no fixed length: unroll it or use 'for' over constants",
    "switch": "'switch' is not read: use 'if'",
    "input": "inputs of the program are not read: give the value as a 'const'",
    "output": "outputs of the program are not read",
    "box": "timing is not read: 'box' has no meaning for a circuit",
    "delay": "timing is not read: 'delay' has no meaning for a circuit",
    "stretch": "timing is not read: 'stretch' has no meaning for a circuit",
    "duration": "timing is not read: 'duration' has no meaning for a circuit",
    "durationof": "timing is not read: 'durationof' has no meaning for a circuit",
    "return": "'return' stands outside a subroutine",
    "break": "'break' is not read: loops run over all their constants",
    "continue": "'continue' is not read: loops run over all their constants",
    "end": "'end' is not read: leave out what comes behind it",
    "array": "arrays are not read",
    "complex": "complex numbers are not read",
    "int": "classical variables are not read: use 'const'",
    "uint": "classical variables are not read: use 'const'",
    "float": "classical variables are not read: use 'const'",
    "angle": "classical variables are not read: use 'const'",
    "bool": "classical variables are not read: use 'bit' or 'const'",
    "pragma": "a pragma may change what the file means, and none is known here",
}
_TOP_LEVEL_ONLY = ("OPENQASM", "include", "qreg", "creg", "qubit", "bit", "const", "let", "gate", "opaque")


class Parser:
    """Parses one statement a call; `version` is set by the reader once the header is known."""

    def __init__(self, lexer: Lexer) -> None:
        self.lexer = lexer
        self.source = lexer.source
        self.version: VersionNumber = 3
        self._depth = 0

    def at_end(self) -> bool:
        """Whether nothing but white space and comments is left."""
        return self.lexer.peek().kind == "end"

    def top_level(self) -> Declaration | Statement:
        """The next statement or declaration of the file."""
        token = self.lexer.peek()
        while token.text == "@" and self.version == 3:
            self.lexer.take()
            self.lexer.skip_line()
            token = self.lexer.peek()
            if token.kind == "end":
                raise self.source.error("an annotation needs a statement behind it", token.position)
        if token.kind == "name" and token.text in _TOP_LEVEL_ONLY:
            found = DeclarationParser(self).parse(token)
            if found is not None:
                return found
        return self.statement()

    def statement(self) -> Statement:
        """The next statement that may stand in a block."""
        token = self.lexer.peek()
        if token.kind == "physical":
            raise self.source.error(
                f"physical qubits like {token.text} are not read: declare a register", token.position
            )
        if token.kind == "pragma":
            raise self.source.error(_REFUSED["pragma"], token.position)
        if token.kind == "symbol" and token.text == "{" and self.version == 3:
            return Block(self.block(), token.position)
        if token.kind != "name":
            raise self.lexer.unexpected(token, "a statement")
        word = token.text
        if self.version == 2 and word in VERSION_3_ONLY and self._is_keyword_use(token):
            raise self.source.error(
                f"'{word}' belongs to OpenQASM 3, and this file is OpenQASM 2", token.position
            )
        if word in ("measure", "reset", "barrier", "if"):
            return self._keyword_statement(token)
        if self.version == 3:
            if word == "for":
                return self._loop()
            if word in _REFUSED:
                raise self.source.error(_REFUSED[word], token.position)
            if word in _TOP_LEVEL_ONLY and word != "opaque":
                raise self.source.error(
                    f"'{word}' must stand at the top level, outside blocks", token.position
                )
        return self._gate_or_assignment()

    def _is_keyword_use(self, token: Token) -> bool:
        """In OpenQASM 2 these words are free names: only what reads as version 3 is complained about."""
        return self.lexer.character_after(token) in ("@", "[", "{") or token.text in (
            "qubit",
            "bit",
            "for",
            "let",
            "const",
            "gphase",
        )

    def _keyword_statement(self, token: Token) -> Statement:
        self.lexer.take()
        if token.text == "if":
            return self._branch(token)
        if token.text == "measure":
            source = self.operand()
            if not self.lexer.accept("->"):
                if self.lexer.peek().text == ";":
                    raise self.source.error(
                        "this measurement throws its outcome away: name the bit that takes it", token.position
                    )
                raise self.lexer.unexpected(self.lexer.peek(), "'->'")
            found: Statement = Measurement(source, self.operand(), token.position)
        elif token.text == "reset":
            found = Reset(self.operand(), token.position)
        else:
            operands = () if self.lexer.peek().text == ";" else self.operands()
            found = Barrier(operands, token.position)
        self.close_statement()
        return found

    def _branch(self, token: Token) -> Branch:
        self.lexer.expect("(", "after 'if'")
        condition = self.expression()
        self.lexer.expect(")", "after the condition")
        then = self.block_or_statement()
        otherwise: tuple[Statement, ...] = ()
        if self.version == 3 and self.lexer.accept("else"):
            otherwise = self.block_or_statement()
        return Branch(condition, then, otherwise, token.position)

    def _loop(self) -> Loop:
        start = self.lexer.take()
        kind = self.lexer.take()
        if kind.text not in ("int", "uint"):
            raise self.lexer.unexpected(kind, "'int' or 'uint' (the type of the loop variable)")
        self.bracketed_size()
        name = self.fresh_name("the loop variable")
        self.lexer.expect("in", "after the loop variable")
        token = self.lexer.peek()
        over: Span | tuple[Expression, ...]
        if self.lexer.accept("{"):
            over = self._set_items(token)
        elif self.lexer.accept("["):
            selector = self._selector(token)
            if not isinstance(selector, Span):
                raise self.source.error(
                    "a loop runs over a range like [0:3] or a set like {1, 2}", token.position
                )
            over = selector
            self.lexer.expect("]", "after the range")
        else:
            raise self.lexer.unexpected(token, "a range like [0:3] or a set like {1, 2}")
        return Loop(name, over, self.block_or_statement(), start.position)

    def block_or_statement(self) -> tuple[Statement, ...]:
        """The body of `if`, `else` and `for`."""
        if self.version == 3 and self.lexer.peek().text == "{":
            return self.block()
        with_depth = self._deeper()
        body = (self.statement(),)
        self._depth = with_depth
        return body

    def block(self) -> tuple[Statement, ...]:
        """Statements in braces."""
        opening = self.lexer.expect("{", "before a block")
        before = self._deeper()
        found: list[Statement] = []
        while not self.lexer.accept("}"):
            if self.at_end():
                raise self.source.error("this block is never closed: '}' is missing", opening.position)
            found.append(self.statement())
        self._depth = before
        return tuple(found)

    def _deeper(self) -> int:
        before = self._depth
        if before >= _MAX_DEPTH:
            raise self.source.error(
                f"this is nested deeper than {_MAX_DEPTH} levels", self.lexer.peek().position
            )
        self._depth += 1
        return before

    def _gate_or_assignment(self) -> Statement:
        start = self.lexer.peek()
        modifiers: list[Modifier] = []
        while self.version == 3 and self.lexer.peek().text in _MODIFIERS:
            modifiers.append(self._modifier())
        token = self.lexer.take()
        if token.kind != "name":
            raise self.lexer.unexpected(token, "the name of a gate")
        following = self.lexer.peek()
        if not modifiers and following.text in ("[", "=") and token.text != "gphase":
            return self._assignment(token)
        if token.text not in ("gphase", "U", "CX") and token.text in self._reserved():
            raise self.lexer.unexpected(token, "the name of a gate")
        parameters: tuple[Expression, ...] = ()
        if self.lexer.accept("("):
            parameters = self._arguments()
        at_end = self.lexer.peek().text == ";"
        if at_end and token.text != "gphase":
            raise self.source.error(f"the gate '{token.text}' acts on no qubit", self.lexer.peek().position)
        operands = () if at_end else self.operands()
        self.close_statement()
        return GateCall(token.text, tuple(modifiers), parameters, operands, start.position)

    def _modifier(self) -> Modifier:
        token = self.lexer.take()
        argument = None
        if token.text == "pow" or (token.text != "inv" and self.lexer.peek().text == "("):
            self.lexer.expect("(", f"after '{token.text}'")
            argument = self.expression()
            self.lexer.expect(")", f"after the argument of '{token.text}'")
        self.lexer.expect("@", f"after the modifier '{token.text}'")
        return Modifier(token.text, argument, token.position)

    def _arguments(self) -> tuple[Expression, ...]:
        found: list[Expression] = []
        while not self.lexer.accept(")"):
            found.append(self.expression())
            if not self.lexer.accept(","):
                self.lexer.expect(")", "after the parameters")
                break
        return tuple(found)

    def _assignment(self, token: Token) -> Measurement:
        into = self._operand_from(token)
        equals = self.lexer.expect("=", "after the bits to assign to")
        if self.version == 2:
            raise self.source.error(
                "assignments belong to OpenQASM 3, and this file is OpenQASM 2: write 'measure ... -> ...'",
                equals.position,
            )
        if not self.lexer.accept("measure"):
            raise self.source.error(
                "bits can only be assigned a measurement: 'bit = measure qubit;'", self.lexer.peek().position
            )
        found = Measurement(self.operand(), into, token.position)
        self.close_statement()
        return found

    def operands(self) -> tuple[Operand, ...]:
        """Operands separated by commas (OpenQASM 3 lets one more comma follow)."""
        found = [self.operand()]
        while self.lexer.accept(","):
            if self.version == 3 and self.lexer.peek().text in (";", "{"):
                break
            found.append(self.operand())
        return tuple(found)

    def operand(self) -> Operand:
        """A name with its selectors."""
        token = self.lexer.take()
        if token.kind == "physical":
            raise self.source.error(
                f"physical qubits like {token.text} are not read: declare a register", token.position
            )
        if token.kind != "name":
            raise self.lexer.unexpected(token, "the name of a register")
        if token.text in self._reserved() and token.text != "pi":
            raise self.source.error(
                f"'{token.text}' is a word of the language, not a register", token.position
            )
        return self._operand_from(token)

    def _operand_from(self, token: Token) -> Operand:
        selectors: list[Selector] = []
        opening = self.lexer.peek()
        while self.lexer.accept("["):
            before = self._deeper()
            selectors.append(self._selector(opening))
            self._depth = before
            self.lexer.expect("]", "after the index")
            opening = self.lexer.peek()
        return Operand(token.text, tuple(selectors), token.position)

    def _selector(self, opening: Token) -> Selector:
        """What stands between square brackets."""
        token = self.lexer.peek()
        if self.version == 3 and self.lexer.accept("{"):
            return self._set_items(token)
        start = None if token.text == ":" else self.expression()
        if self.lexer.peek().text != ":" or self.version == 2:
            if self.lexer.peek().text == ",":
                raise self.source.error(
                    "registers have one index: for several write {1, 2} or 0:3", self.lexer.peek().position
                )
            assert start is not None
            return start
        parts = [start]
        while len(parts) < 3 and self.lexer.accept(":"):
            parts.append(None if self.lexer.peek().text in ("]", ":") else self.expression())
        if len(parts) == 3:
            return Span(parts[0], parts[1], parts[2], opening.position)
        return Span(parts[0], None, parts[1], opening.position)

    def _set_items(self, opening: Token) -> tuple[Expression, ...]:
        found: list[Expression] = []
        while not self.lexer.accept("}"):
            found.append(self.expression())
            if not self.lexer.accept(","):
                self.lexer.expect("}", "after the set")
                break
        if not found:
            raise self.source.error("this set is empty", opening.position)
        return tuple(found)

    def expression(self) -> Expression:
        """A constant expression or a condition."""
        return ExpressionParser(self, self.version).parse()

    def bracketed_size(self) -> Expression | None:
        """`[size]` where it is written."""
        if not self.lexer.accept("["):
            return None
        before = self._deeper()
        size = self.expression()
        self._depth = before
        self.lexer.expect("]", "after the size")
        return size

    def fresh_name(self, what: str) -> str:
        """A name to declare."""
        token = self.lexer.take()
        if token.kind != "name":
            raise self.lexer.unexpected(token, f"the name of {what}")
        if token.text in self._reserved() or token.text in ("pi", "U"):
            raise self.source.error(
                f"'{token.text}' is a word of OpenQASM {self.version} and cannot name {what}", token.position
            )
        return token.text

    def _reserved(self) -> frozenset[str]:
        return KEYWORDS_3 if self.version == 3 else KEYWORDS_2

    def close_statement(self) -> None:
        """The `;` at the end of a statement."""
        token = self.lexer.peek()
        if token.text == ";" and token.kind == "symbol":
            self.lexer.take()
            return
        raise self._missing_semicolon(token)

    def _missing_semicolon(self, token: Token) -> CircuitFileError:
        last = self.lexer.position - 1
        if token.kind == "end" or "\n" in self.source.text[last : token.position]:
            return self.source.error("';' is missing at the end of this statement", max(last, 0))
        return self.source.error(f"found {shown(token.text)} where ';' is needed", token.position)
