"""Where each qubit's Larmor frequency lands, how it moves with the field, and how far off it may be found."""

from __future__ import annotations

from planner.declare import Derived, Per, Unknown, tolerance, word
from planner.physics import zeeman

_DIRECTION = {"elevation": "magnet.elevation", "azimuth": "magnet.azimuth"}

DERIVEDS = (
    Derived(
        "larmor.set_vector",
        zeeman.set_vector,
        {"field": "magnet.field", **_DIRECTION},
        per=Per.PLAN,
        shown=False,
        trailing=(3,),
    ),
    Derived(
        "larmor.field_at_dot",
        zeeman.field_at_dot,
        {"set_vector": "larmor.set_vector", "local_field": "qubit.local_field"},
        shown=False,
        trailing=(3,),
    ),
    Derived(
        "larmor.tensor", zeeman.g_tensor, {"g": "qubit.g", "g_euler": "qubit.g_euler"}, shown=False, trailing=(3, 3)
    ),
    Derived(
        "larmor.precession",
        zeeman.precession_vector,
        {"g_tensor": "larmor.tensor", "field_at_dot": "larmor.field_at_dot"},
        shown=False,
        trailing=(3,),
        unknown=Unknown("the spin does not precess: the field at the dot, or g along it, is zero"),
    ),
    Derived(
        "larmor.response",
        zeeman.field_response,
        {"g_tensor": "larmor.tensor", "precession_vector": "larmor.precession"},
        shown=False,
        trailing=(3,),
    ),
    Derived(
        "larmor.field",
        zeeman.field_size,
        {"field_at_dot": "larmor.field_at_dot"},
        heading="field",
        display="mT",
        digits=5,
        help="size of the field at the dot, local field included",
    ),
    Derived(
        "larmor.g",
        zeeman.effective_g,
        {"precession_vector": "larmor.precession", "field_size": "larmor.field"},
        heading="g",
        help="effective g along the field at the dot",
    ),
    Derived(
        "larmor.axis",
        zeeman.heavy_axis_share,
        {"g": "qubit.g", "g_euler": "qubit.g_euler", "precession_vector": "larmor.precession", "is_hole": "host.hole"},
        heading="axis",
        unknown=Unknown("a hole with one g value has no known axis: type three principal values", "qubit.g"),
        help="share of the quantisation axis along the principal axis of the largest g (c3 for a scalar g)",
    ),
    Derived(
        "larmor.frequency",
        zeeman.larmor_frequency,
        {"g": "larmor.g", "field": "larmor.field"},
        heading="frequency",
        display="GHz",
        digits=5,
        help="Larmor frequency",
    ),
    Derived(
        "larmor.energy",
        zeeman.zeeman_energy,
        {"frequency": "larmor.frequency"},
        heading="Zeeman",
        display="ueV",
        help="Zeeman energy",
    ),
    Derived(
        "larmor.field_slope",
        zeeman.field_slope,
        {"field_response": "larmor.response", **_DIRECTION},
        heading="per field",
        display="MHz/mT",
        help="change of frequency with the size of the set field",
    ),
    Derived(
        "larmor.elevation_slope",
        zeeman.elevation_slope,
        {"field_response": "larmor.response", "field": "magnet.field", **_DIRECTION},
        heading="per elev.",
        display="MHz/deg",
        help="change of frequency with the elevation of the set field",
    ),
    Derived(
        "larmor.azimuth_slope",
        zeeman.azimuth_slope,
        {"field_response": "larmor.response", "field": "magnet.field", **_DIRECTION},
        heading="per azim.",
        display="MHz/deg",
        help="change of frequency with the azimuth of the set field",
    ),
    Derived(
        "larmor.spacing",
        zeeman.spacing,
        {"frequency": "larmor.frequency", "in_use": word("qubit.role", "use")},
        heading="spacing",
        display="MHz",
        unknown=Unknown("no other qubit is in use"),
        help="distance to the nearest other qubit in use",
    ),
    Derived(
        "larmor.window_remanence",
        zeeman.vector_uncertainty,
        {"field_response": "larmor.response", "uncertainty": "magnet.remanence"},
        shown=False,
    ),
    Derived(
        "larmor.window_local",
        zeeman.vector_uncertainty,
        {"field_response": "larmor.response", "uncertainty": tolerance("qubit.local_field")},
        shown=False,
    ),
    Derived(
        "larmor.window_tensor",
        zeeman.tensor_uncertainty,
        {
            "g": "qubit.g",
            "g_uncertainty": tolerance("qubit.g"),
            "g_euler": "qubit.g_euler",
            "euler_uncertainty": tolerance("qubit.g_euler"),
            "field_at_dot": "larmor.field_at_dot",
            "precession_vector": "larmor.precession",
        },
        shown=False,
    ),
    Derived(
        "larmor.search_window",
        zeeman.search_window,
        {
            "remanence": "larmor.window_remanence",
            "local": "larmor.window_local",
            "tensor": "larmor.window_tensor",
            "field_slope": "larmor.field_slope",
            "field_uncertainty": tolerance("magnet.field"),
            "elevation_slope": "larmor.elevation_slope",
            "elevation_uncertainty": tolerance("magnet.elevation"),
            "azimuth_slope": "larmor.azimuth_slope",
            "azimuth_uncertainty": tolerance("magnet.azimuth"),
        },
        heading="window",
        display="MHz",
        help="standard uncertainty of where the line will be found",
    ),
)
LIMITS = ()
