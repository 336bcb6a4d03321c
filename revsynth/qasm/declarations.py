"""Declarations and the other statements that stand at the top level only."""

from __future__ import annotations

from typing import TYPE_CHECKING

from revsynth.qasm.lexer import Token, shown
from revsynth.qasm.syntax import (
    Alias,
    BitDeclaration,
    ConstantDeclaration,
    Declaration,
    Expression,
    GateDeclaration,
    Header,
    Include,
    QubitDeclaration,
    VersionNumber,
)

if TYPE_CHECKING:
    from revsynth.qasm.parser import Parser

_VERSIONS: dict[str, VersionNumber] = {"2": 2, "2.0": 2, "3": 3, "3.0": 3, "3.1": 3}
_CONSTANT_TYPES = ("int", "uint", "float", "angle", "bool")
_VERSION_3 = ("qubit", "bit", "const", "let")


class DeclarationParser:
    """Reads the declaration that starts at the parser's next token."""

    def __init__(self, parser: Parser) -> None:
        self._parser = parser
        self._lexer = parser.lexer
        self._source = parser.source

    def parse(self, token: Token) -> Declaration | None:
        """The declaration, or None where the word is a plain name in this version (`opaque` in 3)."""
        word = token.text
        if self._parser.version == 3 and word == "opaque":
            if self._lexer.character_after(token).isalpha():
                raise self._source.error("'opaque' belongs to OpenQASM 2", token.position)
            return None
        if self._parser.version == 2 and word in _VERSION_3:
            return None
        self._lexer.take()
        if word == "OPENQASM":
            return self._header(token)
        if word == "include":
            return self._include(token)
        if word in ("qreg", "creg"):
            return self._old_register(token)
        if word == "qubit":
            size = self._parser.bracketed_size()
            name = self._parser.fresh_name("a register")
            self._parser.close_statement()
            return QubitDeclaration(name, size, token.position)
        if word == "bit":
            return self._bits(token)
        if word == "const":
            return self._constant(token)
        if word == "let":
            return self._alias(token)
        return self._gate(token, opaque=word == "opaque")

    def _header(self, token: Token) -> Header:
        number = self._lexer.take()
        if number.kind not in ("int", "float"):
            raise self._lexer.unexpected(number, "a version like 3.0")
        if number.text not in _VERSIONS:
            raise self._source.error(
                f"OpenQASM {shown(number.text)} is not known: 2.0 and 3.0 are read", number.position
            )
        self._parser.close_statement()
        return Header(_VERSIONS[number.text], token.position)

    def _include(self, token: Token) -> Include:
        name = self._lexer.take()
        if name.kind != "string":
            raise self._lexer.unexpected(name, "a file name in quotation marks")
        self._parser.close_statement()
        return Include(name.text[1:-1], token.position)

    def _old_register(self, token: Token) -> Declaration:
        """`qreg name[size];` or `creg name[size];`."""
        name = self._parser.fresh_name("a register")
        size = self._parser.bracketed_size()
        if size is None and self._parser.version == 2:
            raise self._lexer.unexpected(self._lexer.peek(), f"the size of '{name}' in brackets")
        self._parser.close_statement()
        if token.text == "qreg":
            return QubitDeclaration(name, size, token.position)
        return BitDeclaration(name, size, token.position)

    def _bits(self, token: Token) -> BitDeclaration:
        size = self._parser.bracketed_size()
        name = self._parser.fresh_name("a register")
        source = value = None
        if self._lexer.accept("="):
            if self._lexer.accept("measure"):
                source = self._parser.operand()
            else:
                value = self._parser.expression()
        self._parser.close_statement()
        return BitDeclaration(name, size, token.position, source, value)

    def _constant(self, token: Token) -> ConstantDeclaration:
        kind = self._lexer.take()
        if kind.text not in _CONSTANT_TYPES:
            raise self._lexer.unexpected(kind, f"a type of constant ({', '.join(_CONSTANT_TYPES)})")
        width: Expression | None = self._parser.bracketed_size()
        name = self._parser.fresh_name("a constant")
        self._lexer.expect("=", "after the name of a constant")
        value = self._parser.expression()
        self._parser.close_statement()
        return ConstantDeclaration(kind.text, width, name, value, token.position)

    def _alias(self, token: Token) -> Alias:
        name = self._parser.fresh_name("an alias")
        self._lexer.expect("=", "after the name of an alias")
        parts = [self._parser.operand()]
        while self._lexer.accept("++"):
            parts.append(self._parser.operand())
        self._parser.close_statement()
        return Alias(name, tuple(parts), token.position)

    def _gate(self, token: Token, opaque: bool) -> GateDeclaration:
        name = self._parser.fresh_name("a gate")
        parameters: tuple[str, ...] = ()
        if self._lexer.accept("("):
            parameters = self._names("a parameter", ")")
            self._lexer.expect(")", "after the parameters")
        qubits = self._names("a qubit", ";" if opaque else "{")
        if not qubits:
            raise self._source.error(f"the gate '{name}' acts on no qubit", token.position)
        if opaque:
            self._parser.close_statement()
            return GateDeclaration(name, parameters, qubits, None, token.position)
        return GateDeclaration(name, parameters, qubits, self._parser.block(), token.position)

    def _names(self, what: str, closing: str) -> tuple[str, ...]:
        """Names separated by commas, each once, up to the closing symbol."""
        found: list[str] = []
        while self._lexer.peek().text != closing:
            position = self._lexer.peek().position
            name = self._parser.fresh_name(what)
            if name in found:
                raise self._source.error(f"'{name}' is named twice", position)
            found.append(name)
            if not self._lexer.accept(","):
                break
            if self._parser.version == 2 and self._lexer.peek().text == closing:
                raise self._lexer.unexpected(self._lexer.peek(), f"the name of {what}")
        return tuple(found)
