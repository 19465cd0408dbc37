"""Simulated TDR records with their truth, as traces and as requests; and lines made afresh."""

import json
from pathlib import Path

import numpy as np
from scipy.constants import epsilon_0, speed_of_light

from models.reflection.tdr.bench import Calibration, Description, Record, prepare
from models.reflection.tdr.invert_traces import system_behind
from models.reflection.tdr.record import traces, window_axis

RECORDS = Path(__file__).parent / "records"
LENGTHS = {"long": 0.30, "short": 0.10}


def stored(name):
    return json.loads((RECORDS / f"tdr_{name}.json").read_text("utf-8"))


def trace_of(body):
    rho = body["reflection_coefficient"]
    return traces(*window_axis(body["start"], body["window"], len(rho)), rho)


def record(name):
    body = stored(name)["waveform"]
    return Record(trace_of(body), trace_of(body["long_record"]))


def truth(name):
    known = stored(name)["truth"]
    return known["apparent_permittivity_at_1_ghz"], known["bulk_conductivity_S_per_m"]


def calibrated(kind):
    """Bench of the probe with rods of 0.30 m ("long") or 0.10 m ("short"), and its line."""
    probe = stored(f"{kind}_air")["probe"]
    bench = prepare(
        Description(length=probe["probe_length"], impedance=probe["probe_impedance"]),
        Calibration(
            air=record(f"{kind}_air"),
            water=record(f"{kind}_water"),
            short=record(f"{kind}_short"),
            water_temperature=20.0,
        ),
    )
    return bench, system_behind(bench)


def request(kind, *names, **changes):
    """Body of POST /v1/waveforms."""
    return {
        "probe": stored(f"{kind}_air")["probe"],
        "calibration": {
            "air": stored(f"{kind}_air")["waveform"],
            "water": {**stored(f"{kind}_water")["waveform"], "temperature": 20.0},
            "short": stored(f"{kind}_short")["waveform"],
        },
        "waveforms": [stored(name)["waveform"] for name in names],
        **changes,
    }


def chain(s, sections, source=50.0, end="open"):
    """Reflection of sections (impedance, gamma times length) by their chain matrices."""
    a, b, c, d = np.ones_like(s), np.zeros_like(s), np.zeros_like(s), np.ones_like(s)
    for z, gl in sections:
        ch, sh = np.cosh(gl), np.sinh(gl)
        a, b, c, d = (
            a * ch + b * sh / z,
            a * z * sh + b * ch,
            c * ch + d * sh / z,
            c * z * sh + d * ch,
        )
    seen = a / c if end == "open" else b / d
    return (seen - source) / (seen + source)


def probe_sections(s, media, length=0.30, rods=178.631, cable=3.0):
    """Cable, head, and rods in media: (permittivity as a function of s, share of the length)."""
    speed = 0.66 * speed_of_light
    series = cable * (np.sqrt(0.05**2 + s * 1e-4**2) + s * 50.0 / speed)
    shunt = cable * s / (50.0 * speed)
    head = (150.0 / np.sqrt(3.0) * np.ones_like(s), s * 0.04 * np.sqrt(3.0) / speed_of_light)
    sections = [(np.sqrt(series / shunt), np.sqrt(series * shunt)), head]
    for permittivity, share in media:
        index = np.sqrt(permittivity(s))
        sections.append((rods / index, s * index * share * length / speed_of_light))
    return sections


def water(s, temperature=20.0):
    """Kaatze (1989)."""
    static = 10 ** (1.94404 - 1.991e-3 * temperature)
    high = 5.77 - 2.74e-2 * temperature
    time = (3.745e-15 * (1 + 7e-5 * (temperature - 27.5) ** 2)
            * np.exp(2295.7 / (temperature + 273.15)))  # fmt: skip
    return high + (static - high) / (1 + s * time)


def soil(theta, sigma, porosity=0.45, solid=4.7, temperature=20.0, clay=()):
    """Three phases in a square-root law, conduction, and relaxations (strength, Hz) of clay."""

    def permittivity(s):
        root = (1 - porosity) * np.sqrt(solid) + porosity - theta
        total = (root + theta * np.sqrt(water(s, temperature))) ** 2 + sigma / (s * epsilon_0)
        for strength, frequency in clay:
            total = total + strength / (1 + s / (2 * np.pi * frequency))
        return total

    return permittivity


def apparent(permittivity, frequency=1e9):
    return float(np.sqrt(permittivity(np.array([2j * np.pi * frequency])))[0].real ** 2)


def simulated(media, points=1024, window=5.0, length=0.30, rods=178.631, end="open", step=150e-12):
    """Start and step in time, and rho, of a probe at the end of 3 m of cable; no noise."""
    start, gap = window_axis(4.15, window, points)
    every = max(int(np.ceil(gap / 20e-12)), 1)
    fine = gap / every
    count = 1 << int(np.ceil(np.log2(2.0 * (start + gap * points) / fine)))
    period = count * fine
    damping = 14.0 / period
    used = min(count // 2, int(18e9 * period))
    s = damping + 2j * np.pi * np.arange(used) / period
    first = int(start // fine)
    spread = step / 2.5631031310892007
    shape = np.exp(np.square(s * spread) / 2 + s * (start - first * fine)) / s
    spectrum = np.zeros(count // 2 + 1, dtype=complex)
    spectrum[:used] = shape * chain(s, probe_sections(s, media, length, rods), end=end)
    wave = np.fft.irfft(spectrum, count) / fine
    rho = wave[first : first + every * points : every]
    return start, gap, rho * np.exp(damping * (start + gap * np.arange(points)))


def noisy(name_or_media, noise, draws, seed, **options):
    """Many noisy traces of one simulated line, their noise stated."""
    start, gap, rho = simulated(name_or_media, **options)
    drawn = rho + np.random.default_rng(seed).normal(0.0, noise, (draws, rho.size))
    return traces(start, gap, drawn, noise)
