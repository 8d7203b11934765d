"""The published formulas once more, in plain floats: what a bench plan must give.

One electron with a scalar g in Si/SiGe, field and local field along c1. Integrals are done by scipy, equations solved
by bisection, the variance of the clock by its defining sum in 50 digits, so that nothing is shared with the package.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from decimal import Context, Decimal, localcontext
from math import cos, exp, hypot, isnan, log, nan, pi, sin, sqrt

from scipy.integrate import quad  # type: ignore[import-untyped]
from scipy.special import sici  # type: ignore[import-untyped]

MU_B = 13.9962449171e9  # Hz/T, CODATA 2022
H = 6.62607015e-34  # J s, SI 2019
K_B = 1.380649e-23  # J/K, SI 2019
UEV = 1.602176634e-25  # J, SI 2019
HOUR, DAY = 3600.0, 86400.0
REFOCUSED = {1: log(2), 2: 0.39243611, 4: 0.20440050, 8: 0.10436393}  # filter-function sums of Cywinski et al. 2008

# What holds where a plan is silent. The host's numbers: natural silicon (NIST), couplings 4.3 and 2.7 ueV (atoms).
SILENT: Mapping[str, float] = {
    "g": 2.0, "field": 0.5, "local": 0.0, "noise": 1e-6, "drift": 5e-6 / HOUR, "settle": 12e-6 / HOUR, "since": nan,
    "s1": 1e-11, "s100": nan, "aging": 1e-10 / DAY, "temperature": 0.1,
    "spinful": 0.04685, "nuclei": 4e5, "germanium": 0.3, "share": 0.02, "barrier_nuclei": 1e5,
        "barrier_spinful": 0.0775,
    "charge_noise": 0.8 * UEV, "displacement": 1e-3 * 1e-9 / UEV, "gradient": nan, "relative": nan, "flicker": 3e3,
    "white": nan, "nuclear": nan, "tracked": nan, "t1": nan, "t2": nan, "rabi": 2e6, "valley": 150 * UEV,
    "gates": 100.0, "gate_time": nan, "idle": 0.0, "wait": 1e-6, "pulses": 0.0, "phase": 0.25, "gate_error": 1e-3,
    "sequence_error": 0.1, "part": 0.3, "interval": 1800.0, "ramsey": nan, "shots": 1000.0, "contrast": 0.6,
    "shot_time": 200e-6, "record": nan, "aligned": 0.0,
}  # fmt: skip


def results(**known: float) -> dict[str, float]:
    """Every result in the scope of the bench plan, by key; nan where it must be unknown."""
    v = {**SILENT, **known}
    frequency = MU_B * v["g"] * abs(v["field"] + v["local"])
    pulse = 1 / (2 * v["rabi"])
    gate_time = _or(v["gate_time"], pulse)
    sequence_time = v["gates"] * (gate_time + v["idle"])
    time = v["wait"] if v["wait"] > 0 else gate_time
    noise = _noises(v, frequency)
    amplitude, white, lowest = noise["amplitude"], _or(v["white"], 0.0), 1 / _or(v["record"], v["interval"])
    bath = hypot(noise["nuclear"], noise["barrier"], noise["magnet"])

    def chi(t: float) -> float:
        return free(t, bath, amplitude, white, lowest)

    t2_star = _or(v["t2"], solve(chi, 1.0))
    wait = _or(v["ramsey"], t2_star / 2)
    visible = v["contrast"] * exp(-((wait / t2_star) ** 2))
    calibration = 1 / (2 * pi * visible * wait * sqrt(v["shots"]))
    change = clock_change(v, sequence_time)
    measured = not isnan(v["t2"])
    slow = 1 / (sqrt(2) * pi * v["t2"]) if measured else bath
    static = hypot(slow, noise["drift"], calibration, frequency * change)
    free_a, free_s = (0.0, 0.0) if measured else (amplitude, white)
    total = hypot(static, rms(time, free_a, 0.0, lowest), rms(time, 0.0, free_s, lowest))
    detuning = hypot(static, rms(pulse, free_a, 0.0, lowest))
    gate_error = pulse_error(detuning / v["rabi"]) + (1 - exp(-(pi**2) * free_s * pulse)) / 3
    e = min(0.5, gate_error + (1 - exp(-free(v["idle"], static, free_a, free_s, lowest))) / 3 + _relaxed(v, gate_time))

    def one_wait(t: float) -> float:
        return refocused(t, amplitude, white, v["pulses"]) if v["pulses"] else free(t, static, free_a, free_s, lowest)

    big = v["sequence_error"]
    randomised = log(1 - 2 * big) / log(1 - 2 * e) if e < 0.5 else 0.0
    aligned = solve(one_wait, -log(1 - 3 * big)) / (gate_time + v["idle"])
    aligned_error, random_error = (1 - exp(-one_wait(sequence_time))) / 3, (1 - (1 - 2 * e) ** v["gates"]) / 2
    stands = allowed_noise(v)
    w2, f2 = clock_parts(v)
    x = H * frequency / (K_B * v["temperature"])
    model = chi(v["t2"]) if measured else nan
    return {
        "larmor.frequency": frequency, "larmor.energy": H * frequency, "larmor.field_slope": MU_B * v["g"],
        "noise.nuclear": noise["nuclear"], "noise.barrier": noise["barrier"], "noise.magnet": noise["magnet"],
        "noise.drift": noise["drift"], "noise.calibration": calibration, "noise.clock": frequency * change,
        "noise.charge_amplitude": amplitude, "noise.charge": rms(time, amplitude, 0.0, lowest),
        "noise.white": rms(time, 0.0, white, lowest), "noise.total": total,
        "noise.unexplained": sqrt(2 * max(0.0, 1 - model)) / (2 * pi * v["t2"]) if measured else nan,
        "coherence.t2_star": t2_star, "coherence.t2_echo": solve(lambda t: refocused(t, amplitude, white, 1), 1.0),
        "coherence.wait_phase": sqrt(2 * one_wait(v["wait"])) if v["pulses"] else 2 * pi * v["wait"] * total,
        "coherence.gate_error": gate_error, "coherence.error_per_gate": e, "coherence.sequence_time": sequence_time,
        "coherence.gates_randomised": randomised, "coherence.gates_aligned": aligned,
        "coherence.sequence_error": aligned_error if v["aligned"] else random_error,
        "coherence.reachable_gates": aligned if v["aligned"] else randomised, "coherence.allowed_noise": stands,
        "clock.required_accuracy": v["part"] * stands / frequency, "clock.change": change,
        "clock.required_stability":
            v["part"] * sqrt(-2 * log(1 - 3 * big)) / (2 * pi * frequency * sequence_time * sqrt(2)),
        "clock.stability": sqrt(w2 / sequence_time + f2),
        "thermal.ratio": x, "thermal.excited": 1 / (1 + exp(x)), "thermal.readout_error": 1 / (1 + exp(x / 2)),
        "valley.distance": abs(H * frequency - v["valley"]),
        "calibration.wait": wait, "workload.gate_time": gate_time,
    }  # fmt: skip


def clock_change(v: Mapping[str, float], run: float) -> float:
    """Random part over calibration and run, and ageing (Riley, NIST SP 1065)."""
    w2, f2 = clock_parts(v)
    averaging = v["shots"] * v["shot_time"]
    flicker = f2 * flicker_variance(run, v["interval"], averaging) if f2 else 0.0
    return sqrt(w2 / averaging + flicker) + v["aging"] * (run / 2 + v["interval"] + averaging / 2)


def clock_parts(v: Mapping[str, float]) -> tuple[float, float]:
    """White and flicker part, squared, of the Allan deviations at 1 s and 100 s."""
    s1, s100 = v["s1"], _or(v["s100"], v["s1"] / 10)
    w2 = max(0.0, (s1**2 - s100**2) / 0.99)
    f2 = max(0.0, s100**2 - w2 / 100)
    return w2, (f2 if f2 >= 1e-9 * s1**2 else 0.0)


def flicker_variance(run: float, gap: float, averaging: float) -> float:
    """The sum over generalised covariances h (s^2 ln s)/2, with h = 1/(2 ln 2): an Allan deviation of 1."""
    with localcontext(Context(prec=50)):
        t, g, c = Decimal(run), Decimal(gap), Decimal(averaging)
        ends = ((-g - c, 1 / c), (-g, -1 / c), (Decimal(0), -1 / t), (t, 1 / t))
        pairs = [(a * b, abs(p - q)) for p, a in ends for q, b in ends]
        return float(sum(w * s * s * s.ln() for w, s in pairs if s) / (4 * Decimal(2).ln()))


def flicker_integral(z: float) -> float:
    """Integral from z of (1 - cos u)/u^3, by parts down to the cosine integral."""
    return float((sin(z / 2) / z) ** 2 + (sin(z) / z - sici(z)[1]) / 2)


def free(t: float, static: float, amplitude: float, white: float, lowest: float) -> float:
    """chi of free evolution: static, 1/f from the lowest frequency on, and white noise."""
    if t == 0:
        return 0.0
    integral = flicker_integral(2 * pi * lowest * t) if amplitude else 0.0
    return (2 * pi * t) ** 2 * (static**2 / 2 + amplitude**2 * integral) + pi**2 * white * t


def refocused(t: float, amplitude: float, white: float, pulses: float) -> float:
    """chi with refocusing pulses."""
    return (2 * pi * amplitude * t) ** 2 * REFOCUSED[int(pulses)] / 2 + pi**2 * white * t


def rms(t: float, amplitude: float, white: float, lowest: float) -> float:
    """Static rms that dephases as much after t."""
    return sqrt(2 * free(t, 0.0, amplitude, white, lowest)) / (2 * pi * t)


def pulse_error(ratio: float) -> float:
    """Average infidelity of a pi pulse over Gaussian detunings of this rms, in Rabi frequencies."""

    def integrand(r: float) -> float:
        lost = 2 / 3 * (r * r + cos(pi / 2 * sqrt(1 + r * r)) ** 2) / (1 + r * r)
        return lost * exp(-((r / ratio) ** 2) / 2)

    value, _ = quad(integrand, 0, 9 * ratio, epsabs=0, epsrel=1e-11, limit=500)
    return float(2 * value / (ratio * sqrt(2 * pi)))


def allowed_noise(v: Mapping[str, float]) -> float:
    """The smallest detuning of the bounds on phase, gate and (randomised) sequence."""

    def per_gate(sigma: float) -> float:
        return pulse_error(sigma / v["rabi"]) + (1 - exp(-((2 * pi * v["idle"] * sigma) ** 2) / 2)) / 3

    one_gate = (1 - (1 - 2 * v["sequence_error"]) ** (1 / v["gates"])) / 2
    bounds = [solve(lambda s: pulse_error(s / v["rabi"]), v["gate_error"], 1e3), solve(per_gate, one_gate, 1e3)]
    return min(bounds + ([] if v["pulses"] else [v["phase"] / (2 * pi * v["wait"])]))


def solve(rising: Callable[[float], float], wanted: float, start: float = 1e-9) -> float:
    """Where a rising function reaches a value, by bisection on a logarithmic scale."""
    low = high = log(start)
    while rising(exp(high)) < wanted:
        high += 1.0
        if high > log(start) + 60:
            return nan
    while rising(exp(low)) > wanted:
        low -= 1.0
    while high - low > 1e-12:
        middle = (low + high) / 2
        low, high = (middle, high) if rising(exp(middle)) < wanted else (low, middle)
    return exp((low + high) / 2)


def _noises(v: Mapping[str, float], frequency: float) -> dict[str, float]:
    bath = sqrt(v["spinful"] * (4.3 * UEV) ** 2 * 0.25 / v["nuclei"]) / H
    germanium = v["germanium"] * v["barrier_spinful"]
    barrier = v["share"] * sqrt(germanium * (2.7 * UEV) ** 2 * (4.5 * 5.5 / 3) / v["barrier_nuclei"]) / H
    settling = 0.0 if isnan(v["since"]) else v["settle"] * HOUR / max(v["since"], HOUR)
    through_gradient = v["g"] * MU_B * v["gradient"] * v["displacement"] * v["charge_noise"]
    return {
        "nuclear": _or(v["tracked"], _or(v["nuclear"], bath)),
        "barrier": barrier if isnan(v["nuclear"]) else 0.0,
        "magnet": MU_B * v["g"] * v["noise"],
        "drift": MU_B * v["g"] * v["field"] * (v["drift"] + settling) * v["interval"],
        "amplitude": _or(
            v["flicker"], _or(v["relative"] * frequency, _or(through_gradient, nan if v["local"] else 0.0))
        ),
    }


def _relaxed(v: Mapping[str, float], gate_time: float) -> float:
    if isnan(v["t1"]):
        return 0.0
    t = (gate_time + v["idle"]) / v["t1"]
    return 0.5 - exp(-t) / 6 - exp(-t / 2) / 3


def _or(value: float, instead: float) -> float:
    return instead if isnan(value) else value
