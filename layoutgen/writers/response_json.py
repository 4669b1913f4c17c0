"""What report.json says of the response beside the S-parameters: the match, the device, the doubts."""

from __future__ import annotations

import math

from layoutgen.numbers import Fixed, fixed, mm
from layoutgen.response import Correction, DeviceView, Response

__all__ = ["response_entries"]

Entry = dict[str, object]


def response_entries(response: Response | None) -> Entry:
    """Return the report's entries by key; none without a response.

    ``response_correction``: largest |as drawn - wanted| in the band [-]; ``device``: impedances [ohm] as
    ``[re, im]``, null where open; ``doubts``: places [mm] with reasons.
    """
    if response is None:
        return {}
    entries: Entry = {}
    if response.correction is not None:
        entries["response_correction"] = _correction(response.correction)
    if response.device is not None:
        entries["device"] = _device(response.device)
    entries["doubts"] = [
        {
            "at_mm": None if doubt.at is None else [mm(value) for value in doubt.at],
            "items": list(doubt.items),
            "text": doubt.reason,
        }
        for doubt in response.doubts
    ]
    return entries


def _correction(found: Correction) -> Entry:
    return {
        "unallowed": None if found.unallowed is None else fixed(found.unallowed),
        "before": fixed(found.before),
        "after": fixed(found.after),
        "reachable": fixed(found.reachable),
        "losses": fixed(found.losses),
        "angles_deg": {name: fixed(math.degrees(angle)) for name, angle in found.angles.items()},
        "holders": [
            {
                "element": holder.element,
                "alike": list(holder.alike),
                "what": holder.what,
                "without": fixed(holder.without),
            }
            for holder in found.holders
        ],
    }


def _device(view: DeviceView) -> Entry:
    return {
        "frequencies_hz": [fixed(f, 3) for f in view.frequencies],
        "pins": [
            {
                "pin": pin.pin,
                "device_ohm": None if pin.device is None else _ohm(pin.device),
                "wanted_ohm": [_ohm(z) for z in pin.wanted],
                "as_drawn_ohm": [_ohm(z) for z in pin.as_drawn],
            }
            for pin in view.pins
        ],
        "feeds": [
            {
                "net": feed.net,
                "ports": list(feed.ports),
                "wanted_ohm": [_ohm(z) for z in feed.wanted],
                "as_drawn_ohm": [_ohm(z) for z in feed.as_drawn],
            }
            for feed in view.feeds
        ],
        "stability": [
            {
                "part": s.part,
                "k": fixed(s.k) if math.isfinite(s.k) else None,
                "mu": fixed(s.mu) if math.isfinite(s.mu) else None,
                "frequency_hz": fixed(s.at, 3),
                "unstable_hz": None if s.unstable is None else [fixed(f, 3) for f in s.unstable],
            }
            for s in view.stability
        ],
    }


def _ohm(z: complex) -> list[Fixed] | None:
    """Return an impedance as its parts; null where it is open."""
    finite = math.isfinite(z.real) and math.isfinite(z.imag)
    return [fixed(z.real, 4), fixed(z.imag, 4)] if finite else None
