"""Networks: sums on arrays of S-parameters of shape (n, p, p), row: port the wave comes out of, column: port driven."""

from __future__ import annotations

from typing import Any, Literal, NamedTuple, Sequence

from . import _arrays, _core
from ._errors import ArgumentError
from ._frozen import NETWORK, nonzero, number

Errors = Literal["raise", "mark"]
Kind = Literal["S", "Z", "Y", "ABCD", "G", "H"]


def _marks(errors: Any) -> bool:
    if errors not in ("raise", "mark"):
        raise ArgumentError(f"errors = {errors!r}: must be 'raise' or 'mark'", _core.E_ARGUMENT, "errors")
    return bool(errors == "mark")


def _like(lead: tuple[int, ...], ports: int) -> Any:
    return _arrays.empty((*lead, ports, ports), "Z")


def _points(lead: tuple[int, ...]) -> int:
    count = 1
    for length in lead:
        count *= length
    return count


def _real_references(z: Any, ports: int) -> bool:
    """Whether z is one number or one for each port, real."""
    np = _arrays.numpy()
    if np is None:
        return not isinstance(z, complex) and not any(isinstance(value, complex) for value in getattr(z, "__iter__", tuple)())
    found = np.asarray(z)
    return found.dtype.kind != "c" and found.shape in ((), (ports,))


def _complex_references(name: str, z: Any, lead: tuple[int, ...], ports: int) -> Any:
    np = _arrays.numpy()
    if np is None:
        raise TypeError(f"{name}: complex references need NumPy")
    found, _ = _arrays.complexes(name, z)
    try:
        return np.ascontiguousarray(np.broadcast_to(found, (*lead, ports)))
    except ValueError:
        text = f"{name}: an array of shape {found.shape}: must be one, {ports} (a port each), or {(*lead, ports)}"
        raise ArgumentError(text, _core.E_ARGUMENT, name) from None


def renormalise(s: Any, z_from: Any, z_to: Any, *, errors: Errors = "raise") -> Any:
    """S on other reference impedances.

    Parameters
    ----------
    s : complex, shape (n, p, p), p up to 16
    z_from, z_to : ohm, real part 1e-6 to 1e9: one, one for each port (p), or one for each port at each frequency (n, p);
        may be complex
    errors : "raise": the first point that fails raises its exception, with ``index``; "mark": points that fail are NaN

    Returns complex128, shape (n, p, p). Power waves, a = (V + z I)/(2 sqrt(Re z)), b = (V - z* I)/(2 sqrt(Re z)) (Kurokawa,
    IEEE T-MTT 13(3), 1965): with real references the travelling ones. Raises `ArgumentError`, and `NoSuchError` where there
    is no such matrix (condition number beyond 1e14); a `RangeWarning` where fewer than 6 digits are left (beyond 1e10).

    >>> round(float(renormalise([[[0.0]]], 50, 100)[0][0][0].real), 9)
    -0.333333333
    """
    mark = _marks(errors)
    buffer, lead, ports = _arrays.networks("s", s)
    out = _like(lead, ports)
    is_complex = not (_real_references(z_from, ports) and _real_references(z_to, ports))
    if is_complex:
        first = _complex_references("z_from", z_from, lead, ports)
        second = _complex_references("z_to", z_to, lead, ports)
    else:
        first, second = _arrays.repeated("z_from", z_from, ports), _arrays.repeated("z_to", z_to, ports)
    _core.renormalise(buffer, ports, first, second, out, is_complex, mark)
    return out


def convert(matrix: Any, from_: Kind, to: Kind, *, z: Any = 50.0, errors: Errors = "raise") -> Any:
    """One kind of matrix from another.

    Parameters
    ----------
    matrix : complex, shape (n, p, p), p up to 16
    from_, to : "S"; "Z": V = Z I, ohm; "Y": I = Y V, siemens; "ABCD": (V1, I1) = ABCD (V2, -I2) of the left and the right half
        of the ports, p even; of 2-ports also "G": (I1, V2) = G (V1, I2) and "H": (V1, I2) = H (I1, V2)
    z : ohm, references of S: one, or one for each port
    errors : as `renormalise`

    Returns complex128, shape (n, p, p). Textbook. Warnings and exceptions as `renormalise`.

    >>> convert([[[2.0, 0.0], [0.0, 4.0]]], "Z", "Y").tolist()
    [[[(0.5+0j), 0j], [0j, (0.25+0j)]]]
    """
    mark = _marks(errors)
    buffer, lead, ports = _arrays.networks("matrix", matrix)
    out = _like(lead, ports)
    codes = NETWORK.code("from_", from_), NETWORK.code("to", to)
    _core.convert(buffer, ports, *codes, _arrays.repeated("z", z, ports), out, mark)
    return out


def cascade(a: Any, b: Any, *more: Any, errors: Errors = "raise") -> Any:
    """b behind a, and more behind b.

    Parameters
    ----------
    a, b, more : complex, all of one shape (n, p, p), p even, up to 16. Ports 0 .. p/2 - 1 are the left ones, p/2 .. p - 1 the right
        ones; the right ones of one meet the left ones of the next in this order and on the same references
    errors : as `renormalise`

    Returns complex128, shape (n, p, p). In waves, so that nothing need be transmitted. Warnings and exceptions as
    `renormalise`.

    >>> through = [[[0.0, 0.5], [0.5, 0.0]]]
    >>> complex(cascade(through, through, through)[0][1][0])
    (0.125+0j)
    """
    mark = _marks(errors)
    left, lead, ports = _arrays.networks("a", a)
    for name, network in (("b", b), *((f"more[{i}]", item) for i, item in enumerate(more))):
        right, shape, count = _arrays.networks(name, network)
        _same(name, (shape, count), "a", (lead, ports))
        out = _like(lead, ports)
        _core.cascade(left, ports, right, out, mark)
        left = out
    return left


def _same(name: str, found: tuple[tuple[int, ...], int], other: str, wanted: tuple[tuple[int, ...], int]) -> None:
    if found != wanted:
        shapes = [(*lead, ports, ports) for lead, ports in (found, wanted)]
        text = f"{name}: an array of shape {shapes[0]}: must be {shapes[1]} as {other}"
        raise ArgumentError(text, _core.E_ARGUMENT, name)


def deembed(measured: Any, left: Any = None, right: Any = None, *, errors: Errors = "raise") -> Any:
    """What is measured without what stands left and right of it: measured = left, result, right in cascade.

    Parameters
    ----------
    measured : complex, shape (n, p, p), p even
    left, right : complex, of the same shape; None: nothing stands there
    errors : as `renormalise`

    Returns complex128, shape (n, p, p). Warnings and exceptions as `renormalise`; the condition numbers are those of what left and
    right transmit, both ways: 1/|S12 S21| of a 2-port.
    """
    mark = _marks(errors)
    buffer, lead, ports = _arrays.networks("measured", measured)
    before, after = _side("left", left, lead, ports), _side("right", right, lead, ports)
    out = _like(lead, ports)
    _core.deembed(buffer, ports, before, after, out, mark)
    return out


def _side(name: str, network: Any, lead: tuple[int, ...], ports: int) -> Any:
    if network is None:
        return None
    buffer, shape, count = _arrays.networks(name, network)
    _same(name, (shape, count), "measured", (lead, ports))
    return buffer


def shunt(zin: Any, z_ref: float = 50.0, *, errors: Errors = "raise") -> Any:
    """A stub as a 2-port: its input impedance across a line.

    Parameters
    ----------
    zin : ohm, complex, shape (n,), as `Model.zin` gives it; infinite: nothing there
    z_ref : ohm, of the line and of both ports
    errors : as `renormalise`

    Returns complex128, shape (n, 2, 2). Textbook.

    >>> complex(shunt([25.0])[0][1][0])
    (0.5+0j)
    """
    mark = _marks(errors)
    buffer, shape = _arrays.complexes("zin", zin)
    out = _like(shape, 2)
    _core.shunt(buffer, z_ref, out, mark)
    return out


class MixedMode(NamedTuple):
    """A network in mixed modes. s: complex128, shape (n, p, p). z: reference impedances of the modes, ohm, shape (p,)."""

    s: Any
    z: Any


def _pairs(pairs: Any) -> tuple[int, ...]:
    if isinstance(pairs, str) or not hasattr(pairs, "__iter__"):
        raise TypeError(f"pairs: must be a sequence of pairs of ports, not {type(pairs).__name__}")
    flat: list[int] = []
    for i, pair in enumerate(pairs):
        if isinstance(pair, str) or not hasattr(pair, "__iter__"):
            raise TypeError(f"pairs[{i}]: must be two ports, not {type(pair).__name__}")
        ports = [_core.integer(f"pairs[{i}]", port) for port in pair]
        if len(ports) != 2:
            raise ArgumentError(f"pairs[{i}]: {len(ports)} ports: must be two", _core.E_ARGUMENT, "pairs")
        flat += ports
    return tuple(flat)


def to_mixed(s: Any, pairs: Sequence[tuple[int, int]], *, z: Any = 50.0, errors: Errors = "raise") -> MixedMode:
    """Mixed modes of pairs of ports.

    Parameters
    ----------
    s : complex, shape (n, p, p), single-ended
    pairs : of ports from 0, the positive one first: [(0, 2), (1, 3)] for a `Transition` of a pair
    z : ohm, single-ended references: one, or one for each port; also unequal ones
    errors : as `renormalise`

    Order of modes: the pairs' differential ones, their common ones, then the ports of no pair in rising order. Vd = Vp - Vn,
    Id = (Ip - In)/2, Vc = (Vp + Vn)/2, Ic = Ip + In; references zp + zn and zp zn/(zp + zn): 2 z and z/2 of equal ones.
    Returns `MixedMode`. Warnings and exceptions as `renormalise`.
    """
    mark = _marks(errors)
    buffer, lead, ports = _arrays.networks("s", s)
    result = MixedMode(_like(lead, ports), _arrays.empty((ports,), "d"))
    _core.to_mixed(buffer, ports, _pairs(pairs), _arrays.repeated("z", z, ports), *result, mark)
    return result


def to_single(s: Any, pairs: Sequence[tuple[int, int]], *, z: Any = 50.0, errors: Errors = "raise") -> Any:
    """Back from mixed modes.

    Parameters
    ----------
    s : complex, shape (n, p, p), in the modes of `to_mixed`
    pairs, z : as `to_mixed`: z are the single-ended references of the result
    errors : as `renormalise`

    Returns complex128, shape (n, p, p), single-ended.
    """
    mark = _marks(errors)
    buffer, lead, ports = _arrays.networks("s", s)
    out = _like(lead, ports)
    _core.to_single(buffer, ports, _pairs(pairs), _arrays.repeated("z", z, ports), out, mark)
    return out


def port_map(s: Any, ports: Sequence[int]) -> Any:
    """Ports in another order, or some of them.

    Parameters
    ----------
    s : complex, shape (n, p, p)
    ports : m old numbers in their new order, from 0, none twice

    Returns complex128, shape (n, m, m): result[k, i, j] = s[k, ports[i], ports[j]]. Raises `ArgumentError`.

    >>> port_map([[[1, 2], [3, 4]]], [1, 0]).tolist()
    [[[(4+0j), (3+0j)], [(2+0j), (1+0j)]]]
    """
    buffer, lead, count = _arrays.networks("s", s)
    if isinstance(ports, str) or not hasattr(ports, "__iter__"):
        raise TypeError(f"ports: must be a sequence of ports, not {type(ports).__name__}")
    places = tuple(_core.integer(f"ports[{i}]", port) for i, port in enumerate(ports))
    out = _like(lead, len(places))
    _core.port_map(buffer, count, places, out)
    return out


def _checked(call: Any, s: Any, errors: Any) -> Any:
    mark = _marks(errors)
    buffer, lead, ports = _arrays.networks("s", s)
    out = _arrays.empty(lead if lead else None, "d")
    call(buffer, ports, out, mark)
    return out if lead else out[0]


def passivity(s: Any, *, errors: Errors = "raise") -> Any:
    """Largest singular value of S at each frequency: passive where <= 1.

    Parameters
    ----------
    s : complex, shape (n, p, p), on real references
    errors : as `renormalise`

    Returns float64, shape (n,); of one matrix (p, p) a float.
    """
    return _checked(_core.passivity, s, errors)


def reciprocity(s: Any, *, errors: Errors = "raise") -> Any:
    """Largest |Sij - Sji| at each frequency: reciprocal where 0.

    Parameters
    ----------
    s : complex, shape (n, p, p)
    errors : as `renormalise`

    Returns float64, shape (n,); of one matrix (p, p) a float.
    """
    return _checked(_core.reciprocity, s, errors)


class Causality(NamedTuple):
    """How much comes too early. early: float64, shape (p, p), share of the energy of every impulse response that comes more than
    resolution before t0. resolution: s, 1.67 over the last frequency."""

    early: Any
    resolution: float


def _over_time(freq: Any, s: Any) -> tuple[Any, Any, int]:
    frequencies, shape = _arrays.doubles("freq", freq)
    buffer, lead, ports = _arrays.networks("s", s)
    if shape is None or len(shape) != 1 or lead != shape:
        text = f"s: an array of shape {(*lead, ports, ports)}: must be (n, p, p) for n frequencies, here {shape}"
        raise ArgumentError(text, _core.E_ARGUMENT, "s")
    return frequencies, buffer, ports


def causality(freq: Any, s: Any, *, t0: float = 0.0) -> Causality:
    """Whether what comes out comes after what goes in.

    Parameters
    ----------
    freq : Hz, shape (n,), n >= 4, 0 to 1e12, rising, to f_max, the last
    s : complex, shape (n, p, p)
    t0 : s, >= 0: 0, or the delay that nothing can undercut

    The band is weighted by a Kaiser window (beta 10), which blurs by the resolution: below 1e-7 (points interpolated: 1e-3)
    nothing can be said against the data, but an advance shorter than that, or beyond the band, does not show. What wraps
    round counts as early, and so does noise. Frequencies: evenly spaced ones keep their step, f_max over a whole number; others
    get 4 n steps. Points that are no multiples of it are interpolated, by cubics about the mean delay. What is missing down
    to 0 is continued; a `RangeWarning` where the first frequency is above f_max/20, `ArgumentError` above f_max/2. Whatever
    lasts longer than 1/step wraps round. Time grows as n^2 p^2.
    """
    frequencies, buffer, ports = _over_time(freq, s)
    early = _arrays.empty((ports, ports), "d")
    return Causality(early, _core.causality(frequencies, buffer, ports, t0, early))


def step_response(freq: Any, s: Any, t: Any, *, rise_time: float, to: int = 1, from_: int = 0) -> Any:
    """Response at one port to a unit step into another.

    Parameters
    ----------
    freq, s : as `causality`
    t : s, 0 is the middle of the edge: a number or an array of any shape
    rise_time : s, 20 to 80 percent, of an integrated Gaussian
    to, from_ : numbers of the ports, from 0

    Returns float64 of the shape of t. A `RangeWarning` where rise_time < 1/f_max (more than 1e-3 of the edge's spectrum is
    beyond the band), or a time is not within -1/4 to 3/4 of 1/step. Frequencies as `causality`.
    """
    frequencies, buffer, ports = _over_time(freq, s)

    def call(times: Any, out: Any) -> None:
        _core.step_response(frequencies, buffer, ports, to, from_, rise_time, times, out)

    return _arrays.evaluate(call, t, "d", None, name="t")


def tdr(freq: Any, s: Any, t: Any, *, rise_time: float, port: int = 0, z_ref: float = 50.0) -> Any:
    """Impedance seen at a port against time, ohm: z_ref (1 + rho)/(1 - rho), rho the step response of its reflection.

    Parameters
    ----------
    freq, s, t, rise_time : as `step_response`; time goes there and back
    port : its number, from 0
    z_ref : ohm, its reference

    Returns float64 of the shape of t; inf where rho >= 1. Reflections behind other reflections are not taken apart. Warnings
    as `step_response`.
    """
    frequencies, buffer, ports = _over_time(freq, s)

    def call(times: Any, out: Any) -> None:
        _core.tdr(frequencies, buffer, ports, port, z_ref, rise_time, times, out)

    return _arrays.evaluate(call, t, "d", None, name="t")


class LossDeviation(NamedTuple):
    """What an insertion loss leaves over a smooth one, a0 + a1 sqrt(f) + a2 f + a4 f^2.

    a0, a1, a2, a4: dB, dB/sqrt(Hz), dB/Hz, dB/Hz^2. rms, greatest: of the deviation (loss less fit), dB: root mean square,
    largest absolute. fom: root of the mean of W deviation^2, W = sinc^2(f/fb)/((1 + (f/ft)^4)(1 + (f/fr)^8)), ft =
    0.2365/transition_time; NaN without a symbol rate. points: frequencies within the fit. deviation: dB, float64, shape (n,),
    NaN outside the fit.
    """

    a0: float
    a1: float
    a2: float
    a4: float
    rms: float
    greatest: float
    fom: float
    points: int
    deviation: Any


def insertion_loss_deviation(
    freq: Any,
    loss: Any,
    *,
    f_low: float | None = None,
    f_high: float | None = None,
    constant: bool = False,
    weighted: bool = False,
    symbol_rate: float | None = None,
    transition_time: float | None = None,
    receiver_bandwidth: float | None = None,
) -> LossDeviation:
    """Deviation of an insertion loss from a smooth one.

    Parameters
    ----------
    freq : Hz, shape (n,), 0 to 1e12, rising
    loss : dB, shape (n,): -20 log10 |S21|
    f_low, f_high : Hz, of the fit, both included; None: the first, the last frequency
    constant : with a0
    weighted : a point counts by 10^(-loss/20) (IEEE 802.3, 93A.3); else all alike
    symbol_rate : Bd, for the figure of merit; None: none
    transition_time : s, of the transmitter, 20 to 80 percent; None: none
    receiver_bandwidth : Hz, of the receiver's filter; None: 0.75 of the symbol rate

    Returns `LossDeviation`. Raises `ArgumentError`.
    """
    values = []
    for name, value in (
        ("f_low", f_low), ("f_high", f_high), ("symbol_rate", symbol_rate), ("transition_time", transition_time),
        ("receiver_bandwidth", receiver_bandwidth),
    ):
        check = number if name == "f_low" else nonzero
        values.append(0.0 if value is None else check(name, value))
    record = _core.record("loss_fit", (*values[:2], int(bool(constant)), int(bool(weighted)), *values[2:]))
    frequencies, shape = _arrays.doubles("freq", freq)
    losses, other = _arrays.doubles("loss", loss)
    if shape is None or len(shape) != 1 or other != shape:
        text = f"loss: an array of shape {other}: must be (n,) for n frequencies, here {shape}"
        raise ArgumentError(text, _core.E_ARGUMENT, "loss")
    deviation = _arrays.empty(shape, "d")
    found = _core.insertion_loss_deviation(frequencies, losses, record, deviation)
    return LossDeviation._make((*found, deviation))
