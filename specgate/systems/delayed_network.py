"""A wiring with dead times solved exactly: its modes and its channels as quasi-polynomials.

The dead times are cut out (`delay_cut`). With M(s) the rational transfer functions from what leaves the cuts to what
enters them, and Z = diag(e^(-delay s)), closing the cuts again multiplies the determinant by det(I - M Z), and a
transfer function is a Schur complement: a determinant bordered by one row and one column over that one. No dead
time is approximated, and nothing is reduced but by exact common factors.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from functools import cached_property

from flint import fmpq, fmpq_mpoly, fmpq_poly

from specgate.systems.blocks import OutputRef, SignalRef, Wiring
from specgate.systems.delay_cut import CutWiring, Gap, without_dead_time
from specgate.systems.delay_ring import DelayRing
from specgate.systems.equations import Equations
from specgate.systems.network import Network, merged_blocks
from specgate.systems.polynomials import ONE, least_common_multiple, product
from specgate.systems.quasi import Quasi
from specgate.systems.transfer import TransferFunction
from specgate.terms.records import record


@record
class DelayedTransfer:
    """numerator / denominator, quasi-polynomials without a common factor; coherent SI.

    The denominator has an undelayed term, whose leading coefficient is 1. factors: of the denominator, without common
    roots but s = 0 and each with simple roots but there, with their multiplicities.
    """

    numerator: Quasi
    denominator: Quasi
    factors: tuple[tuple[Quasi, int], ...] = ()

    @property
    def proper(self) -> bool:
        """Whether no term of the numerator is of higher degree than the undelayed term of the denominator."""
        return self.numerator.degree <= self.denominator.undelayed.degree()

    @property
    def poles_at_origin(self) -> int:
        """The number of poles at s = 0: exact, by derivatives there."""
        return max(0, -self.order_at_origin) if self.numerator else 0

    @property
    def zeros_at_origin(self) -> int:
        """The number of zeros at s = 0. Raises ValueError for zero."""
        return max(0, self.order_at_origin)

    @property
    def order_at_origin(self) -> int:
        """Zeros minus poles at s = 0. Raises ValueError for zero."""
        return self.numerator.first_at_origin()[0] - self.denominator.first_at_origin()[0]

    @property
    def value_at_origin(self) -> fmpq:
        """The limit of s^-order times itself at s = 0, not zero. Raises ValueError for zero."""
        return self.numerator.first_at_origin()[1] / self.denominator.first_at_origin()[1]

    @property
    def rational(self) -> TransferFunction | None:
        """The same as a transfer function, None where it has a dead time."""
        if not (self.numerator.is_rational and self.denominator.is_rational):
            return None
        return TransferFunction(self.numerator.undelayed, self.denominator.undelayed)


@record
class DelayedGroup:
    """Strongly connected components that share blocks, with the modes of these blocks as closed."""

    outputs: tuple[OutputRef, ...]
    instances: tuple[str, ...]
    modes: fmpq_mpoly


@record
class DelayedNetwork:
    """The solved equations of a wiring with dead times.

    drawn: the graph as drawn, dead times closed (its own modes are those without them and are never asked for).
    rest: the solved rational rest.
    """

    wiring: Wiring
    drawn: Network
    cut: CutWiring
    rest: Network
    ring: DelayRing

    @staticmethod
    def of(wiring: Wiring) -> DelayedNetwork:
        """Gap a wiring. Raises KeyError for a reference to nothing."""
        cut = without_dead_time(wiring)
        ring = DelayRing(one.delay for one in cut.gaps)
        return DelayedNetwork(wiring, Network(Equations(wiring)), cut, Network(Equations(cut.rest)), ring)

    @cached_property
    def _between(self) -> Mapping[tuple[Gap, Gap], TransferFunction]:
        """Transfer functions from what leaves a cut to what enters one: {(entered, left): …}."""
        return {(to, by): self.rest.fraction(to.before, by.after) for to in self.cut.gaps for by in self.cut.gaps}

    @cached_property
    def groups(self) -> tuple[DelayedGroup, ...]:
        """The components with blocks, those upstream first."""
        equations = self.drawn.equations
        found = []
        for members in merged_blocks(self.drawn):
            unknowns = [equations.unknowns[variable] for index in members for variable in self.drawn.blocks[index]]
            outputs = tuple(unknown for unknown in unknowns if isinstance(unknown, OutputRef))
            instances = tuple(dict.fromkeys(output.instance for output in outputs))
            found.append(DelayedGroup(outputs, instances, self._modes(instances)))
        return tuple(found)

    def _modes(self, instances: Sequence[str]) -> fmpq_mpoly:
        """Return the modes of some groups of the rest, closed by the cuts among them."""
        rational = product(g.modes for g in self.rest.groups if set(g.instances) <= set(instances))
        cuts = [cut for cut in self.cut.gaps if cut.output.instance in instances]
        rows, scale = [], ONE
        for to in cuts:
            row, common = self._row([self._between[to, by] for by in cuts], cuts, to)
            rows.append(row)
            scale = scale * common
        return self.ring.polynomial(rational) * self.ring.determinant(rows) / self.ring.polynomial(scale)

    def _row(
        self, entries: Sequence[TransferFunction], cuts: Sequence[Gap], own: Gap | None
    ) -> tuple[list[fmpq_mpoly], fmpq_poly]:
        """Return a row of I - M Z, or of -M Z without an own cut, cleared of its denominators; and what cleared it.

        A last entry beyond the cuts is that of the input, with a plus sign and no dead time.
        """
        ring, common = self.ring, least_common_multiple(entry.denominator for entry in entries)
        whole = [ring.polynomial(entry.numerator * (common // entry.denominator)) for entry in entries]
        row = [-entry * ring.delay(cut.delay) for entry, cut in zip(whole, cuts, strict=False)]
        if own is not None:
            row[cuts.index(own)] += ring.polynomial(common)
        return row + whole[len(cuts) :], common

    def fraction(self, combination: Mapping[str, fmpq], source: str) -> tuple[fmpq_mpoly, fmpq_mpoly]:
        """Return a sum of constant times signal or input per unit of a loop input, reduced: numerator, denominator."""
        outside = SignalRef(source)
        cuts = self._concerned(combination, outside)
        rows = []
        for to in cuts:
            entries = [*(self._between[to, by] for by in cuts), self.rest.fraction(to.before, outside)]
            rows.append(self._row(entries, cuts, to)[0])
        last = [self._combined(combination, node) for node in (*(cut.after for cut in cuts), outside)]
        row, common = self._row(last, cuts, None)
        numerator = self.ring.determinant([*rows, row])
        denominator = self.ring.determinant([row[:-1] for row in rows]) * self.ring.polynomial(common)
        divisor = numerator.gcd(denominator)
        return numerator / divisor, denominator / divisor

    def _concerned(self, combination: Mapping[str, fmpq], outside: SignalRef) -> list[Gap]:
        """Return the cuts on a way from an input to some signals."""
        after = self.drawn.downstream([outside])
        before = self.drawn.upstream([SignalRef(name) for name in combination])
        return [cut for cut in self.cut.gaps if cut.output in after and cut.output in before]

    def _combined(self, combination: Mapping[str, fmpq], source: SignalRef) -> TransferFunction:
        """Return a sum of nodes of the rest per unit of one of its inputs."""
        entries = [(factor, self.rest.fraction(SignalRef(name), source)) for name, factor in combination.items()]
        common = least_common_multiple(entry.denominator for _, entry in entries)
        total = fmpq_poly()
        for factor, entry in entries:
            total += entry.numerator * (common // entry.denominator) * factor
        return TransferFunction(total, common)

    def transfer(self, fraction: tuple[fmpq_mpoly, fmpq_mpoly]) -> DelayedTransfer:
        """Return a reduced fraction as quasi-polynomials."""
        numerator, denominator = (self.ring.quasi(part) for part in fraction)
        lead = fmpq(1) / denominator.undelayed.leading_coefficient()
        factors = tuple((self.ring.quasi(one), times) for one, times in fraction[1].factor_squarefree()[1])
        return DelayedTransfer(numerator.scaled(lead), denominator.scaled(lead), factors)
