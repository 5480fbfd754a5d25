"""Step figures and margins of wired loops without specgate: state equations, matrix exponentials, bracketing.

Blocks are state-space realisations, wired by solving one linear system for all signals. The response at a time is
`scipy.linalg.expm` of the state matrix with the constant input appended; extremes and crossings are bracketed on an
even grid of steps and closed by `scipy.optimize.brentq` on that same exponential, never on the grid's values.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from scipy.linalg import block_diag, expm
from scipy.optimize import brentq, minimize_scalar
from scipy.signal import tf2ss

Matrix = np.ndarray
Block = tuple[Matrix, Matrix, Matrix, Matrix]
Sources = Mapping[object, float]
"""Coefficients by what they multiply: an input, a signal, a block, or (block, index of its output)."""

_TIGHT = {"xtol": 1e-13, "rtol": 1e-14}


def transfer(numerator: list[float], denominator: list[float]) -> Block:
    """Realise a transfer function, coefficients with the highest power first."""
    if len(denominator) == 1:
        return np.zeros((0, 0)), np.zeros((0, 1)), np.zeros((1, 0)), np.array([[numerator[0] / denominator[0]]])
    return tf2ss(numerator, denominator)


def gain(value: float) -> Block:
    """Realise a constant."""
    return transfer([value], [1.0])


def lag(time: float, value: float = 1.0) -> Block:
    """Realise value / (1 + time s)."""
    return transfer([value], [time, 1.0])


class Loop:
    """Blocks, what feeds each of their inputs, and the signals; everything in SI."""

    def __init__(
        self,
        inputs: list[str],
        blocks: Mapping[str, Block],
        feeds: Mapping[str, Sources | list[Sources]],
        signals: Mapping[str, Sources],
    ) -> None:
        self.inputs, self.signals = inputs, list(signals)
        self._parts = (inputs, blocks, feeds, signals)
        names = list(blocks)
        a, b, c, d = (_stack([blocks[name][k] for name in names]) for k in range(4))
        fed = [(name, k) for name in names for k in range(blocks[name][1].shape[1])]
        given = [(name, k) for name in names for k in range(blocks[name][2].shape[0])]
        # unknowns are the signals, then the blocks' inputs, then their outputs
        unknown: list[object] = [*signals, *(("into", *pair) for pair in fed), *given]
        place = {name: row for row, name in enumerate(unknown)} | {
            n: len(signals) + len(fed) + given.index((n, 0)) for n in names
        }
        left, from_inputs = np.eye(len(unknown)), np.zeros((len(unknown), len(inputs)))
        rows: list[tuple[object, Sources]] = list(signals.items())
        for name, feed in feeds.items():
            rows += [
                (("into", name, k), sources) for k, sources in enumerate(feed if isinstance(feed, list) else [feed])
            ]
        for target, sources in rows:
            for source, factor in sources.items():
                if source in inputs:
                    from_inputs[place[target], inputs.index(str(source))] += factor
                else:
                    left[place[target], place[source]] -= factor
        into, out = slice(len(signals), len(signals) + len(fed)), slice(len(signals) + len(fed), None)
        left[out, into] -= d
        from_states = np.zeros((len(unknown), a.shape[0]))
        from_states[out] = c
        by_states, by_inputs = np.linalg.solve(left, from_states), np.linalg.solve(left, from_inputs)
        self.a, self.b = a + b @ by_states[into], b @ by_inputs[into]
        self.c, self.d = by_states[: len(signals)], by_inputs[: len(signals)]

    @property
    def poles(self) -> list[complex]:
        """Return every mode of the loop, sorted by real and imaginary part."""
        return [complex(pole) for pole in np.sort_complex(np.linalg.eigvals(self.a))]

    def step(self, source: str, target: str, size: float, horizon: float, final: float | None = None) -> Step:
        """Drive one input with a step and look at one signal, up to a time by which nothing moves any more."""
        j, i = self.inputs.index(source), self.signals.index(target)
        return Step(self.a, self.b[:, j] * size, self.c[i], self.d[i, j] * size, horizon, final)

    def opened(self, source: str, held: tuple[str, ...] = ()) -> Opened:
        """Cut every use of a signal or of a block's output, with other signals held at zero."""
        inputs, blocks, feeds, signals = self._parts

        def cut(sources: Sources) -> Sources:
            renamed = {"cut" if one == source else one: factor for one, factor in sources.items()}
            return {one: factor for one, factor in renamed.items() if one not in held}

        fed = {n: [cut(one) for one in feed] if isinstance(feed, list) else cut(feed) for n, feed in feeds.items()}
        drawn = {name: cut(sources) for name, sources in signals.items()} | {"returned": {source: 1}}
        loop = Loop([*inputs, "cut"], blocks, fed, drawn)
        column, row = len(inputs), len(drawn) - 1
        return Opened(loop.a, loop.b[:, column], loop.c[row], float(loop.d[row, column]))


@dataclass(frozen=True)
class Opened:
    """The loop opened at a signal: L is minus what returns of what is injected."""

    a: Matrix
    b: Matrix
    c: Matrix
    d: float

    def at(self, frequency: float) -> complex:
        """Return L at an angular frequency."""
        return -complex(self.c @ np.linalg.solve(1j * frequency * np.eye(len(self.a)) - self.a, self.b) + self.d)

    def margins(self) -> dict[str, float]:
        """Return the margins: changes of sign on a grid of frequencies, closed by brentq on L itself."""
        grid = np.geomspace(1e-5, 1e3, 8001)
        values = np.array([self.at(w) for w in grid])

        def roots(of: Callable[[complex], float]) -> list[float]:
            signs = np.sign([of(value) for value in values])
            changes = np.flatnonzero(signs[1:] != signs[:-1])
            return [float(brentq(lambda w: of(self.at(w)), grid[k], grid[k + 1], **_TIGHT)) for k in changes]

        gains = roots(lambda value: math.log(abs(value)))
        phases = [w for w in roots(lambda value: value.imag) if self.at(w).real < 0]
        lags = [(math.degrees(np.angle(-self.at(w))), w) for w in gains]
        worst = int(np.argmin(np.abs(1 + values)))
        nearest = minimize_scalar(
            lambda w: abs(1 + self.at(w)), bounds=(grid[worst - 1], grid[worst + 1]), options={"xatol": 1e-12}
        )
        return {
            "gain_margin": min(abs(20 * math.log10(abs(self.at(w)))) for w in phases) if phases else math.inf,
            "phase_margin": min(abs(lag) for lag, _ in lags),
            "delay_margin": min(math.radians(lag % 360) / w for lag, w in lags),
            "sensitivity_peak": max(1.0, 1 / float(nearest.fun)),
            "crossover_frequency": gains[0],
        }


def _stack(parts: list[Matrix]) -> Matrix:
    stacked = block_diag(*parts)
    shape = (sum(part.shape[0] for part in parts), sum(part.shape[1] for part in parts))
    return np.asarray(stacked, float).reshape(shape)


@dataclass(frozen=True)
class Step:
    """A step response; `final` is given by hand where the state matrix is singular (an integrator on the side)."""

    a: Matrix
    b: Matrix
    c: Matrix
    jump: float
    horizon: float
    known_final: float | None = None

    @cached_property
    def _matrix(self) -> Matrix:
        order = len(self.b)
        return np.block([[self.a, self.b.reshape(order, 1)], [np.zeros((1, order + 1))]])

    @cached_property
    def _row(self) -> Matrix:
        return np.append(self.c, self.jump)

    def at(self, time: float) -> float:
        """Return the response at a time."""
        return float(self._row @ expm(self._matrix * time)[:, -1])

    def rate(self, time: float) -> float:
        """Return the first derivative at a time."""
        return float(self._row @ self._matrix @ expm(self._matrix * time)[:, -1])

    @cached_property
    def grid(self) -> tuple[Matrix, Matrix]:
        """Return 20,000 even steps of time and the response there: brackets only."""
        count, block = 20_000, 200
        advance = expm(self._matrix * (self.horizon / count))
        states = [np.append(np.zeros(len(self.b)), 1.0)]
        for _ in range(block - 1):
            states.append(advance @ states[-1])
        part, leap, values = np.array(states).T, np.linalg.matrix_power(advance, block), []
        for _ in range(count // block + 1):
            values.append(self._row @ part)
            part = leap @ part
        return np.linspace(0, self.horizon, count + 1), np.concatenate(values)[: count + 1]

    @cached_property
    def final(self) -> float:
        """Return the final value."""
        if self.known_final is not None:
            return self.known_final
        return float(self.jump - self.c @ np.linalg.solve(self.a, self.b))

    def extreme(self, sign: int) -> tuple[float, float | None]:
        """Return the greatest (or least) value over t > 0 and its time; none where it is only approached."""
        times, values = self.grid
        scale = max(abs(self.final), float(np.max(np.abs(values))))
        assert abs(values[-1] - self.final) < 1e-6 * scale, "the horizon is too short"
        k = int(np.argmax(sign * values))
        if k == len(times) - 1 or sign * (values[k] - self.final) <= 1e-9 * scale:
            return self.final, None
        if k == 0:
            return self.jump, 0.0
        time = float(brentq(self.rate, times[k - 1], times[k + 1], **_TIGHT))
        return self.at(time), time

    def settling(self, distance: float) -> float:
        """Return the time after which the response stays within a distance of its final value."""
        times, values = self.grid
        k = int(np.nonzero(np.abs(values - self.final) > distance)[0][-1])
        assert k < len(times) - 2, "the horizon is too short"
        return float(brentq(lambda t: abs(self.at(t) - self.final) - distance, times[k], times[k + 1], **_TIGHT))

    def arrival(self, fraction: float) -> float:
        """Return the first time at which the response has come a fraction of the way to its final value."""
        times, values = self.grid
        k = int(np.nonzero(values / self.final >= fraction)[0][0])
        if k == 0:
            return 0.0
        return float(brentq(lambda t: self.at(t) / self.final - fraction, times[k - 1], times[k], **_TIGHT))

    def figures(self) -> dict[str, float | None]:
        """Return the figures of a response that settles, in SI and per cent."""
        (greatest, when), (least, when_least) = self.extreme(1), self.extreme(-1)
        found: dict[str, float | None] = {
            "final_value": self.final,
            "initial_value": self.jump,
            "maximum_value": max(greatest, self.jump),
            "minimum_value": min(least, self.jump),
        }
        found["peak_deviation"] = max(abs(greatest), abs(least))
        if self.final == 0:
            return found
        up = self.final > 0
        past, back = (greatest, least) if up else (least, greatest)
        found["overshoot"] = max(0.0, (past / self.final - 1) * 100)
        found["undershoot"] = max(0.0, -back / self.final * 100)
        found["peak_time"] = when if up else when_least
        found["settling_time"] = self.settling(abs(self.final) * 0.02)
        found["rise_time"] = self.arrival(0.9) - self.arrival(0.1)
        found["delay_time"] = self.arrival(0.5)
        return found
