"""What is wrong with a request, in the words in which it was made: a query, or a command.

Messages are written for JSON, which can say everything; a table is described by a query or by
options, where the same thing is said in another way.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from service.errors import Unprocessable
from service.faults import Fault
from service.formats import MEDIA_TYPES
from service.schemas.batch_query import PLACES

_UNITS = re.compile(r'"units": \{"(\w+)": "([^"]+)"\}')
_OWN = re.compile(r'"(?:mixing_model|pore_water_model)": \{"name": "[^"]+", "(\w+)": \.\.\.\}')
_DOTTED = re.compile(r"\b(soil|probe|assume|propagation)\.([a-z_0-9]+)\b")
_POINTER = re.compile(r"#/(soil|probe|assume|propagation|mixing_model|pore_water_model|units)"
                      r"(?:/(\w+))?")  # fmt: skip
_PLAIN = re.compile(r"#/(\w+)")
_WORDS: Mapping[tuple[str, str], str] = MappingProxyType(
    {(section, key): word for word, (section, key, _) in PLACES.items()}
)


@dataclass(frozen=True, slots=True)
class Manner:
    """One way to say what JSON says."""

    begins: str
    """What stands before a word where it is pointed at."""
    units: str
    """How a unit is named: {0} the quantity, {1} its code."""
    own: str
    """How a parameter of a model's own is given: {0} its name."""
    dashed: bool = False
    """Whether words are options."""
    others: tuple[tuple[str, str], ...] = ()
    """Turns of phrase that fit a request over HTTP alone."""

    def text(self, said: str) -> str:
        """A sentence in this manner."""
        said = _UNITS.sub(lambda m: self.units.format(m[1], self._code(m[2])), said)
        said = _OWN.sub(lambda m: self.own.format(m[1]), said)
        said = _DOTTED.sub(lambda m: self._word(m[1], m[2]) or m[0], said)
        for phrase, other in self.others:
            said = said.replace(phrase, other)
        return said

    def place(self, pointer: str) -> str:
        """A place in this manner."""
        if pointer.startswith("?"):
            return self._pointed(pointer[1:])
        found = _POINTER.fullmatch(pointer)
        if found is None:
            plain = _PLAIN.fullmatch(pointer)
            return self._pointed(plain[1]) if plain and plain[1] in PLACES else pointer
        section, key = found[1], found[2] or ""
        if section == "units" or not key:
            return self._pointed(section)
        word = _WORDS.get((section, key))
        if word is None and self.dashed:
            return self.own.format(key).removesuffix("=...")
        return self._pointed(word or key)

    def _word(self, section: str, key: str) -> str | None:
        word = _WORDS.get((section, key))
        return self._pointed(word) if word and self.dashed else word

    def _pointed(self, word: str) -> str:
        return self.begins + (word.replace("_", "-") if self.dashed else word)

    def _code(self, code: str) -> str:
        return code if self.dashed else code.replace("%", "%25")


QUERY = Manner("?", "units={0}:{1}", "{0}=...")
_TURNS = (
    ("give it in the query", "give it as an option"),
    ("?columns=", "--columns"),
    (
        "send it as application/json, or line by line as NDJSON",
        "write one object on each line and say --read ndjson",
    ),
    (', or as application/json an object with "readings"', ""),
    ("say so with Content-Encoding: gzip", "unpack it, or name it .csv.gz or .ndjson.gz"),
    *((f"send it as {kind}", f"say --read {key}") for key, kind in MEDIA_TYPES.items()),
    *((f"ask for {kind}", f"say --format {key}") for key, kind in MEDIA_TYPES.items()),
)
COMMAND = Manner("--", "--units {0}:{1}", "--parameter {0}=...", dashed=True, others=_TURNS)


def worded(problem: Unprocessable, manner: Manner) -> Unprocessable:
    """The same refusal in another manner."""
    faults = [Fault(manner.text(f.detail), manner.place(f.pointer)) for f in problem.errors]
    return Unprocessable(manner.text(str(problem.detail)), faults, problem.headers, problem.more)
