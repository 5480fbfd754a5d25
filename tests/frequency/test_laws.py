"""Laws of margins: scaling time or gain, the image in 1/s, and the order of blocks."""

from __future__ import annotations

from collections.abc import Callable

from flint import fmpq, fmpq_poly
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from specgate.frequency.choose import order
from specgate.frequency.rational_gain import RationalGain
from specgate.frequency.rational_loop import RationalLoop
from specgate.frequency.values import reciprocal, scaled
from specgate.response.answers import Answer
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction

Pair = tuple[fmpq_poly, fmpq_poly]
S = fmpq_poly([0, 1])

small = st.integers(1, 40).map(lambda n: fmpq(n, 8))


def loops(least: int = 1) -> st.SearchStrategy[Pair]:
    lag = small.map(lambda t: fmpq_poly([1, t]))
    swing = st.tuples(small, small).map(lambda p: fmpq_poly([p[0], p[1] / 8, 1]))

    def made(parts: tuple[list[fmpq_poly], list[fmpq_poly], bool, fmpq]) -> Pair:
        poles, zeros, integrating, gain = parts
        above, below = fmpq_poly([gain]), S if integrating else fmpq_poly([1])
        for pole in poles:
            below *= pole
        for zero in zeros:
            above *= zero
        return above, below

    return st.tuples(
        st.lists(st.one_of(lag, swing), min_size=least, max_size=least + 2),
        st.lists(lag, max_size=2),
        st.booleans(),
        small,
    ).map(made)


def loop(pair: Pair) -> RationalLoop:
    above, below = pair
    return RationalLoop(TransferFunction(above, below), is_hurwitz(above + below))


def same(first: Answer, second: Answer) -> bool:
    """Whether two answers agree: both without limit, or not told apart."""
    if first.absent is not None or second.absent is not None:
        return (
            first.absent is not None and second.absent is not None and first.absent.infinite == second.absent.infinite
        )
    return order(first, second) in (0, None)


def frequency(answer: Answer) -> Answer:
    assert answer.at is not None
    found = answer.at["frequency"]
    assert isinstance(found, Answer)
    return found


ASKED: list[Callable[[RationalLoop], Answer]] = [
    RationalLoop.gain_margin_up,
    RationalLoop.gain_margin_down,
    RationalLoop.phase_margin,
    RationalLoop.sensitivity_peak,
]


@settings(max_examples=40, deadline=None)
@given(loops(), small)
def test_faster_time_moves_frequencies_only(pair: Pair, speed: fmpq) -> None:
    slow, fast = loop(pair), loop((pair[0](S / speed), pair[1](S / speed)))
    for ask in ASKED:
        assert same(ask(slow), ask(fast))
        if ask(slow).absent is None and frequency(ask(slow)).absent is None:
            assert same(scaled(frequency(ask(slow)), speed), frequency(ask(fast)))
    if slow.delay_margin().absent is None:
        assert same(slow.delay_margin(), scaled(fast.delay_margin(), speed))
    assert len(slow.crossings()) == len(fast.crossings())


@settings(max_examples=40, deadline=None)
@given(loops(), small)
def test_a_higher_gain_takes_from_the_margin_upwards(pair: Pair, gain: fmpq) -> None:
    first, second = loop(pair), loop((pair[0] * gain, pair[1]))
    assume(first.stable and second.stable)
    up, down = first.gain_margin_up(), second.gain_margin_down()
    # what stays stable from one to the other leaves the next limits where they were
    reached = up.absent is not None or order(up, Answer.of_exact(gain)) == 1
    fallen = first.gain_margin_down()
    held = fallen.absent is not None or order(fallen, Answer.of_exact(1 / gain)) == 1
    if reached and held:
        assert same(up, second.gain_margin_up() if up.absent else scaled(second.gain_margin_up(), gain))
        assert down.absent is not None if fallen.absent is not None else same(fallen, scaled(down, 1 / gain))
    one, other = first.phase_crossover_frequency(), second.phase_crossover_frequency()
    assert (one.absent is None) is (other.absent is None)
    assert one.absent is not None or same(one, other)


@settings(max_examples=40, deadline=None)
@given(loops())
def test_the_image_in_one_over_s_turns_the_other_way(pair: Pair) -> None:
    degree = max(pair[0].degree(), pair[1].degree())
    image = tuple(fmpq_poly(list(reversed([p[k] for k in range(degree + 1)]))) for p in pair)
    here, there = loop(pair), loop((image[0], image[1]))
    assume(here.stable and there.stable)
    for ask in (RationalLoop.gain_margin_up, RationalLoop.gain_margin_down, RationalLoop.sensitivity_peak):
        assert same(ask(here), ask(there))
    assert same(here.phase_margin_lag(), there.phase_margin_lead())
    assert same(here.phase_margin_lead(), there.phase_margin_lag())
    peak = here.sensitivity_peak()
    at = frequency(peak)
    if at.absent is None and at.exact != 0:
        assert same(reciprocal(at), frequency(there.sensitivity_peak()))


@settings(max_examples=30, deadline=None)
@given(loops(least=4))
def test_a_margin_used_up_leaves_a_loop_at_its_limit(pair: Pair) -> None:
    found = loop(pair)
    up = found.gain_margin_up()
    if up.absent is not None:
        return
    below = up.enclose(128).lower().fmpq() * (1 - fmpq(1, 10**20))
    assert is_hurwitz(pair[1] + pair[0] * below)
    if up.exact is not None:
        assert not is_hurwitz(pair[1] + pair[0] * up.exact)


@settings(max_examples=30, deadline=None)
@given(loops())
def test_sensitivities_of_one_loop_agree(pair: Pair) -> None:
    """The least distance is one over the peak; the gain at the bandwidth lies 3 dB down."""
    found = loop(pair)
    assume(found.stable)
    assert same(reciprocal(found.sensitivity_peak()), found.least_distance())
    closed = RationalGain(TransferFunction(pair[0], pair[0] + pair[1]))
    width = closed.bandwidth()
    if width.absent is None:
        ball = width.enclose(128)
        low, high = ball.lower().fmpq(), ball.upper().fmpq()
        start = closed.gain_at(fmpq(0)).enclose(128)
        assert closed.gain_at(low).enclose(128) / start > 0.7079457
        assert closed.gain_at(high).enclose(128) / start < 0.7079458
