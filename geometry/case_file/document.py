"""One case file, read once: its tree and its variants, each of which makes a Case."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from nightcap.geometry.case import Case, Limits, Source
from nightcap.geometry.case_file.assembly import assemble, file_unit
from nightcap.geometry.case_file.expansion import expand
from nightcap.geometry.case_file.materials import Stock
from nightcap.geometry.case_file.own_materials import read_beside
from nightcap.geometry.case_file.parameters import Parameters, read_parameters
from nightcap.geometry.case_file.problems import Problems, nearest, under
from nightcap.geometry.case_file.variants import Variant, read_variants_of, varied_names
from nightcap.geometry.case_file.yaml_tree import Planter, Tree, UnreadableError, compose
from nightcap.geometry.errors import CaseError, Problem


@dataclass(frozen=True)
class Document:
    """What a file says, before numbers are put in for its parameters."""

    name: str
    tree: dict[str, Tree]
    source: Source
    problems: tuple[Problem, ...]
    """Mistakes that all variants share."""
    parameters: Parameters
    variants: tuple[Variant, ...]
    """At least one; a file that varies nothing, or wrongly, has one without name and values."""
    beside: Stock | None = None
    """The materials, if they are listed in another file."""

    def case(self, variant: Variant) -> Case:
        """The case of one variant. Raises CaseError with every mistake of the file and of this variant."""
        problems = Problems(self.source, list(self.problems))
        values = self.parameters.values(variant.values, problems)
        case = assemble(self.tree, self.name, problems, values, self.beside)
        self._check_use(variant, problems)
        problems.raise_any()
        return replace(
            case,
            parameters=self.parameters.records(values),
            variant=self.in_si_units(variant),
            variant_name=variant.name,
        )

    def in_si_units(self, variant: Variant) -> dict[str, float]:
        """The varied values; lengths, as far as the entries read so far tell which these are, in m."""
        lengths, unit = self.parameters.lengths(), self.parameters.unit
        return {name: value * (unit if name in lengths else 1.0) for name, value in variant.values.items()}

    def _check_use(self, variant: Variant, problems: Problems) -> None:
        """Varying what nothing depends on would solve one problem many times."""
        used = self.parameters.used()
        for name in variant.values:
            if name not in used:
                path = next(key for key in self._vary() if name in key.replace(" ", "").split(","))
                near = nearest(name, used - set(variant.values))
                problems.add(under("vary", path), f"nothing in the file depends on {name!r}{near}")

    def _vary(self) -> Mapping[str, Tree]:
        vary = self.tree.get("vary")
        return vary if isinstance(vary, dict) else {}


def document_of(text: str, file: str = "", name: str = "case") -> Document:
    """Reads a text. Raises CaseError if it is no mapping; all other mistakes are kept."""
    lines: dict[str, int] = {}
    problems = Problems(Source(file, lines))
    try:
        node = compose(text)
        if node is None:
            raise UnreadableError(None, "is empty")
        tree = Planter(lines, problems).tree(node)
        if not isinstance(tree, dict):
            raise UnreadableError(1, "must be a mapping with keys such as conductors and boundary")
    except UnreadableError as error:
        raise CaseError([Problem(file, error.line, "", error.text)]) from error
    plain = expand(tree, problems)
    parameters = read_parameters(plain.get("parameters"), file_unit(plain), problems, varied_names(plain.get("vary")))
    variants = read_variants_of(plain.get("vary"), parameters, _most_variants(plain), problems)
    beside = read_beside(plain.get("materials"), problems)
    return Document(name, plain, problems.source, tuple(problems.found), parameters, variants or (Variant(),), beside)


def _most_variants(tree: dict[str, Tree]) -> int:
    """The limit, which is checked later, when the other limits are."""
    limits = tree.get("limits")
    count = limits.get("variants") if isinstance(limits, dict) else None
    is_count = isinstance(count, int) and not isinstance(count, bool) and 1 <= count <= 10**6
    return count if is_count and isinstance(count, int) else Limits().variants
