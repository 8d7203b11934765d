"""The floor of an evaluation: the same closed forms in bare numpy, straight on arrays, without declarations, kinds or reasons.

Silicon electrons as in the demo, nothing refocused, randomised errors, everything locked.
"""

from __future__ import annotations

import numpy as np

from planner.physics import addressing, clock, coils, dephasing, gates, noise, nuclei, thermal, tones, zeeman

LOCAL = np.array([[146.0, 0, 8], [151.2, 0, 9], [155.6, 0, 9], [160.9, 0, 10], [163.3, 0, 10], [168.8, 0, 11]]) * 1e-3
AMPLITUDE = np.array([4.0, 4.6, 5.2, 5.0, 4.4, 3.8]) * 1e3
VALLEY = np.array([142.0, 118, 96, 70, 131, 205]) * 1.602176634e-25


def arrays(count: int) -> dict[str, np.ndarray]:
    """Local fields, noise amplitudes and valley splittings of `count` qubits, repeating the six of the demo."""
    which = np.arange(count) % 6
    return {"local": LOCAL[which], "amplitude": AMPLITUDE[which], "valley": VALLEY[which]}


def evaluation(given: dict[str, np.ndarray]) -> tuple[np.ndarray, ...]:
    """Every result and margin of the demo's evaluation."""
    one = lambda value: np.array([value])
    count = len(given["amplitude"])
    rows = lambda value: np.full(count, value)
    nothing, in_use = rows(np.nan), np.ones(count)
    field, elevation, azimuth, interval = one(0.42), one(0.0), one(0.0), one(1200.0)
    g, euler = np.full((count, 3), 2.0), np.zeros((count, 3))
    rabi, shots, shot_time, gate_count, allowed = rows(2e6), one(800.0), one(120e-6), one(500.0), one(0.1)
    wait, idle, share, pulses = one(1.5e-6), one(0.0), one(0.3), one(0.0)

    vector = zeeman.set_vector(field=field, elevation=elevation, azimuth=azimuth)
    at_dot = zeeman.field_at_dot(set_vector=vector, local_field=given["local"])
    size = zeeman.field_size(field_at_dot=at_dot)
    tensor = zeeman.g_tensor(g=g, g_euler=euler)
    precession = zeeman.precession_vector(g_tensor=tensor, field_at_dot=at_dot)
    effective = zeeman.effective_g(precession_vector=precession, field_size=size)
    frequency = zeeman.larmor_frequency(g=effective, field=size)
    energy = zeeman.zeeman_energy(frequency=frequency)
    response = zeeman.field_response(g_tensor=tensor, precession_vector=precession)
    slope = zeeman.field_slope(field_response=response, elevation=elevation, azimuth=azimuth)
    up = zeeman.elevation_slope(field_response=response, field=field, elevation=elevation, azimuth=azimuth)
    round_about = zeeman.azimuth_slope(field_response=response, field=field, elevation=elevation, azimuth=azimuth)
    axis = zeeman.heavy_axis_share(g=g, g_euler=euler, precession_vector=precession, is_hole=one(0.0))
    spacing = zeeman.spacing(frequency=frequency, in_use=in_use)
    remanence = zeeman.vector_uncertainty(field_response=response, uncertainty=np.array([[2e-3, 5e-4, 5e-4]]))
    local = zeeman.vector_uncertainty(field_response=response, uncertainty=np.zeros((count, 3)))
    of_tensor = zeeman.tensor_uncertainty(
        g=g,
        g_uncertainty=0 * g,
        g_euler=euler,
        euler_uncertainty=euler,
        field_at_dot=at_dot,
        precession_vector=precession,
    )
    window = zeeman.search_window(
        remanence=remanence,
        local=local,
        tensor=of_tensor,
        field_slope=slope,
        field_uncertainty=one(0.0),
        elevation_slope=up,
        elevation_uncertainty=one(0.0087),
        azimuth_slope=round_about,
        azimuth_uncertainty=one(0.0),
    )
    lo = tones.local_oscillator(frequency=frequency, in_use=in_use, half_width=one(5e8))

    lowest = dephasing.lowest_frequency(time=interval)
    bath = nuclei.bath_noise(moment=one(1.186e-49), spinful_fraction=one(8e-4), nuclei=one(4e5))
    nuclear = nuclei.nuclear_noise(model=bath, typed=rows(11e3), tracked=nothing, axis_share=axis, is_hole=one(0.0))
    under = nuclei.barrier_bath_noise(
        moment=one(1.5e-48), germanium=one(0.3), spinful=one(0.0775), share=one(0.02), nuclei=one(1e5)
    )
    barrier = nuclei.barrier_noise(model=under, typed=rows(11e3))
    no_coils, nothing_off = np.zeros((0, 3)), np.zeros(0)
    magnet = coils.magnet_noise(
        field_response=response,
        noise=np.full((1, 3), 5e-9),
        direction=no_coils,
        is_off=nothing_off,
        coil_noise=nothing_off,
    )
    moves = {
        "field_response": response, "field_slope": slope, "field": field, "interval": interval, "direction": no_coils,
        "coil_field": nothing_off, "coil_rate": nothing_off,
    }  # fmt: skip
    own, settling = (coils.drifted(**moves, rate=one(rate)) for rate in (8.3e-12, 3.3e-9))
    drift = coils.drift_after_ramp(own=own, settling=settling, since_ramp=one(np.nan))
    charge = noise.charge_amplitude(
        typed=given["amplitude"],
        own_relative=nothing,
        frequency=frequency,
        gradient=nothing,
        g=effective,
        displacement=one(6e9),
        charge_noise=one(1.3e-25),
        material_relative=one(np.nan),
        is_hole=one(0.0),
        local_field=given["local"],
    )
    white = noise.or_zero(density=nothing)
    t2 = dephasing.t2_star(
        nuclear=nuclear,
        barrier=barrier,
        magnet=magnet,
        amplitude=charge,
        density=white,
        lowest=lowest,
        measured=nothing,
    )
    calibration = noise.calibration_noise(contrast=one(0.55), wait=one(4e-6), t2_star=t2, shots=shots)
    pulse = gates.pi_pulse(rabi_frequency=rabi)
    sequence = gates.sequence_time(gates=gate_count, gate_time=pulse, idle=idle)
    w = clock.white_fm(deviation_1s=one(2e-12), deviation_100s=one(1e-12))
    flicker = clock.flicker_fm(deviation_1s=one(2e-12), deviation_100s=one(1e-12), white=w)
    run = clock.run_time(sequence_time=sequence, longest_wait=wait, shot_time=shot_time)
    averaging = clock.averaging_time(shots=shots, shot_time=shot_time)
    change = clock.clock_change(
        white=w, flicker=flicker, aging=one(1.2e-16), run=run, gap=interval, averaging=averaging
    )
    clocked = noise.scaled_tone(frequency=frequency, change=change)
    loose = noise.loose_noise(tone=one(np.nan), drift=one(2e-7))
    static = dephasing.static_noise(
        nuclear=nuclear,
        barrier=barrier,
        magnet=magnet,
        measured_t2_star=nothing,
        drift=drift,
        calibration=calibration,
        clock=clocked,
        loose=loose,
    )
    free = dephasing.free_flicker(amplitude=charge, measured_t2_star=nothing)
    free_white = dephasing.free_white(density=white, measured_t2_star=nothing)
    over = gates.noise_time(wait=wait, gate_time=pulse)
    seen = dephasing.flicker_rms(amplitude=charge, lowest=lowest, time=over)
    seen_white = dephasing.white_rms(density=white, time=over)
    total = dephasing.total_noise(static=static, amplitude=free, density=free_white, lowest=lowest, time=over)
    refocused = noise.refocused_amplitude(
        amplitude=charge,
        typed=given["amplitude"],
        own_relative=nothing,
        material_relative=one(np.nan),
        gradient=nothing,
        white=nothing,
    )
    echo = dephasing.t2_echo(amplitude=refocused, density=white)
    phase = dephasing.wait_phase(total=total, amplitude=one(np.nan), density=white, wait=wait, pulses=pulses)
    detuning = gates.pulse_detuning(static=static, amplitude=free, lowest=lowest, duration=pulse)
    gate = gates.gate_error(detuning=detuning, rabi_frequency=rabi, density=free_white, duration=pulse)
    error = gates.error_per_gate(
        gate_error=gate,
        static=static,
        amplitude=free,
        density=free_white,
        lowest=lowest,
        gate_time=pulse,
        idle=idle,
        t1=rows(0.06),
    )
    randomised = gates.gates_randomised(error=error, allowed=allowed)
    aligned = gates.gates_aligned(
        static=static,
        free_amplitude=free,
        free_density=free_white,
        amplitude=one(np.nan),
        density=white,
        lowest=lowest,
        pulses=pulses,
        allowed=allowed,
        gate_time=pulse,
        idle=idle,
    )
    whole = gates.sequence_error(
        error=error,
        gates=gate_count,
        aligned=one(0.0),
        static=static,
        free_amplitude=free,
        free_density=free_white,
        amplitude=one(np.nan),
        density=white,
        lowest=lowest,
        pulses=pulses,
        sequence_time=sequence,
    )
    stands = gates.allowed_noise(
        rabi_frequency=rabi,
        idle=idle,
        wait=wait,
        pulses=pulses,
        gates=gate_count,
        allowed_phase=one(0.25),
        allowed_gate_error=one(1e-3),
        allowed_sequence_error=allowed,
    )
    accuracy = clock.required_accuracy(source_share=share, allowed_noise=stands, frequency=frequency)
    wanted = clock.required_stability(
        source_share=share, frequency=frequency, sequence_time=sequence, allowed_sequence_error=allowed
    )
    stable = clock.stability(white=w, flicker=flicker, sequence_time=sequence)
    ratio = thermal.thermal_ratio(frequency=frequency, temperature=one(0.095))
    excited, tail = thermal.excited_share(ratio=ratio), thermal.tunnelling_error(ratio=ratio)
    blockade = thermal.smallest_in_use(valley_splitting=given["valley"], in_use=in_use)
    need = thermal.blockade_need(temperature=one(0.095))
    distance = thermal.valley_distance(energy=energy, valley_splitting=given["valley"])
    part = noise.allowed_share(source_share=share, allowed_noise=stands)
    settled = coils.settling_time(own=own, settling=settling, allowed=part)
    away = tones.intermediate_frequency(frequency=frequency, oscillator=lo)
    image = addressing.image_distance(frequency=frequency, oscillator=lo, in_use=in_use)
    offset, largest = (
        addressing.offset_size(intermediate=away),
        addressing.largest_rabi(rabi_frequency=rabi, in_use=in_use),
    )
    driven = {
        "frequency": frequency,
        "rabi_frequency": rabi,
        "largest": largest,
        "drive_leak": one(1.0),
        "in_use": in_use,
    }
    crossed = addressing.crosstalk_ratio(**driven)
    imaged = addressing.image_ratio(**driven, oscillator=lo, image=one(1e-4))
    leaked = addressing.leakage_ratio(offset=offset, largest=largest, leakage=one(1e-4))
    flips = tuple(addressing.flip(ratio=ratio) for ratio in (crossed, imaged, leaked))
    shift = addressing.crosstalk_phase(ratio=crossed, drive_leak=one(1.0))
    spent = addressing.time_share(in_use=in_use, shots=shots, shot_time=shot_time, wait=one(4e-6), interval=interval)
    edge = tones.band_distance(frequency=frequency, low=one(1e9), high=one(1.8e10))
    margins = (
        edge / tones.band_need(guard=one(5e7), search_window=window),
        part / drift,
        part / magnet,
        part / calibration,
        accuracy / change,
        wanted / stable,
        0.25 / phase,
        1e-3 / error,
        randomised / gate_count,
        blockade / need,
        distance / one(1.28e-24),
    )
    return (
        *(1e-3 / each for each in flips),
        5e8 / offset,
        0.05 / spent,
        image,
        settled,
        shift,
        lo,
        spacing,
        excited,
        tail,
        echo,
        aligned,
        whole,
        seen,
        seen_white,
        *margins,
    )
