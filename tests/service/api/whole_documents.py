"""Documents of every kind with every member that there is, each as small as it can be."""

from typing import Any

FEATURE = {"purpose": "drive", "shape": "hole", "radius_mm": 11, "first_at_deg": 45, "count": 2} | {
    "width_mm": 3,
    "length_mm": 3,
}
SPRING = {"elastic_modulus_n_per_mm2": 2e5, "width_mm": 20, "thickness_mm": 0.4, "length_mm": 3000} | {
    "wound_turns": 8,
    "usable_turns": 6,
}
WINDING = {"spring": SPRING, "barrel_to_disc": [2.5], "disc_to_brake": [30], "brake_turns_per_s": 40} | {
    "efficiency": 0.7,
    "friction_nmm": 1,
}
DRIVE = {"torque_limit_nmm": 100, "surplus_torque_nmm": 20, "disc_inertia_kg_m2": 1e-4} | {
    "train": [{"inertia_kg_m2": 1e-6, "ratio": 30}],
    "winding": WINDING,
}
TOOTH = {"tooth": 1, "track": 1, "pitch": "C4", "cents": 3, "damped": True, "usable": True} | {
    "stiffness_n_per_mm": 2,
    "lift_mm": 0.3,
    "end_mass_ratio": 0.2,
    "quality": 300,
}
DISC = {"outer_diameter_mm": 118, "thickness_mm": 0.5, "material": "steel", "centre_hole_mm": 7} | {
    "flatness_mm": 0.1,
    "run_out_mm": 0.06,
    "centre_hole_play_mm": 0.1,
    "density_kg_m3": 7850,
    "shear_strength_n_per_mm2": 276,
    "rolled_along_deg": 10,
    "features": [FEATURE],
}
HEAD = {"title": "All", "turns": "clockwise", "revolution_s": 40, "fastest_revolution_s": 36}
MOVEMENT = {"format": "discwright-movement/1", "id": "all", "revision": 2, **HEAD} | {
    "before_music_deg": 20,
    "after_music_deg": 14,
    "gantry_offset_mm": 0.1,
    "disc": DISC,
    "keep_out": [{"from_radius_mm": 0, "to_radius_mm": 7, "why": "clamped"}],
    "star_wheel": {"engagement_arc_mm": 3.2, "release_arc_mm": 0.45, "thickness_mm": 0.4},
    "projection": {"kind": "slot", "width_mm": 1.3, "length_mm": 2.2},
    "damper_arc_mm": 0.9,
    "damper_recovery_s": 0.15,
    "drive": DRIVE,
    "tooth_quality": 200,
    "tracks": [{"track": 1, "radius_mm": 20, "engagement_arc_mm": 3.2, "release_arc_mm": 0.4}],
    "teeth": [TOOTH],
}
WHEEL = {"points": 8, "tip_radius_mm": 5, "root_radius_mm": 3, "axis_depth_mm": 5.5, "thickness_mm": 0.4} | {
    "release_angle_deg": 8
}
STANDING = {
    **MOVEMENT,
    "star_wheel": WHEEL,
    "projection": {"kind": "standing", "width_mm": 1.3, "depth_mm": 1, "depth_plus_minus_mm": 0.1, "forming": "fold"},
    "tracks": {"first_radius_mm": 20, "last_radius_mm": 20, "count": 1},
}
MACHINE = {"format": "discwright-cutter/1", "id": "all", "title": "All", "kerf_mm": 0.1, "min_web_mm": 0.5} | {
    "min_slot_mm": 0.5,
    "position_tolerance_mm": 0.04,
    "angle_tolerance_deg": 0.01,
    "drawn_from": "star-side",
    "layers": {"RIM": {"name": "EDGE", "colour": 3}},
    "drawing_release": "R12",
    "labels": False,
    "burr_side": "star-side",
    "feeds": {name: 2 for name in ("cut_mm_per_s", "rapid_mm_per_s", "pierce_s", "mark_mm_per_s", "hit_s")}
    | {name: 2 for name in ("turn_deg_per_s", "slide_mm_per_s", "tool_change_s")},
    "rates": {"currency": "EUR"} | {name: "1.5" for name in ("setup", "per_minute", "per_pierce", "per_hit", "per_kg")},
    "feature_rules": {name: [0.7, 1, 1.5] for name in ("hole", "web", "edge", "slit")},
    "net_section": {"least_line_share": 0.4, "least_ring_share": 0.4},
    "tolerance_class": "iso-2768-m",
}
FOLD = {"inside_radius_mm": 0.2, "fold_side": "behind", "relief_mm": 0.5, "slit": "channel", "slit_width_mm": 0.4} | {
    "relief_width_mm": 0.4,
    "relief_ends": "round",
    "least_inside_radius_mm": 0.1,
    "springback": {"opens_deg": 3},
}
LASER = {**MACHINE, "kind": "laser", "kerf_compensated": True, "fold": FOLD, "lead_in": {"length_mm": 1}} | {
    "bridges": {"count": 3, "width_mm": 0.3, "slugs": {"count": 1, "width_mm": 0.2, "least_slug_mm": 9}}
}
LANCE = {"tool": "L1", "title": "lance", "makes": "lance", "footprint_length_mm": 2, "footprint_width_mm": 1.6} | {
    "edge_ahead_mm": 0.7,
    "tab_width_mm": 1.2,
    "tab_depth_mm": 1.4,
    "foot": {"length_mm": 5, "width_mm": 3},
}
PUNCH = {"capacity_n": 2e4, "stripping_share": 0.2, "metric_word": "G21", "strike_word": "M20", "forms": "up"} | {
    "change_word": "T{tool} M6",
    "turns_one_way": False,
    "take_up_deg": 1,
}
PRESS = {**MACHINE, "kind": "punch-press", "kerf_compensated": False, "tools": [LANCE], "press": PUNCH}
WRITING = {"pluck_again_s": 1, "ornaments": "as-any-note", "chords": "bass-first", "two_teeth_from_velocity": 90} | {
    "ringing_tooth_cost": 0.1,
    "ringing_bass_cost": 0.1,
}
SETTINGS = {"format": "discwright-settings/1", "title": "All", "order": "W-1", "octave_moves": "all"} | {
    "passage": {"from_bar": 1, "from_beat": 1, "to_bar": 9, "to_beat": 1},
    "speed": {"mode": "factor", "factor": 1.1, "least": 0.9, "most": 1.2},
    "transpose": {"mode": "fixed", "semitones": 3, "range": 5},
    "octave_fit": 0.5,
    "largest_nudge_ms": 9,
    "largest_melody_nudge_ms": 5,
    "channels": {"leave_out": [3], "keep_only": [1], "lead": 1},
    "rulings": [{"note": 3, "do": "place", "track": 2}],
    "sequence": 1,
    "discs": 2,
    "load_limit": "ignore",
    "time_limit_s": 10,
    "writing": WRITING,
}
IN_SECONDS = {"passage": {"from_s": 1, "to_s": 9}}
STOCK = {"id": "sheet", "lot": "7", "quantity": 1, "width_mm": 900, "height_mm": 600, "margin_mm": 5} | {
    "openings_mm": [[[10, 10], [20, 10], [10, 20]]],
    "clamps": [{"x_mm": 0, "y_mm": 0, "width_mm": 30, "height_mm": 30}],
}
JOB = {"format": "discwright-sheets/1", "title": "All", "gap_mm": 2, "margin_mm": 5, "least_remnant_mm": 90} | {
    "stock": [STOCK],
    "discs": [{"id": "disc", "diameter_mm": 100, "quantity": 3}],
    "layers": {"RIM": {"name": "EDGE", "colour": 3}},
    "labels": True,
}
OUTLINED = {**JOB, "stock": [{"id": "left", "outline_mm": [[0, 0], [400, 0], [0, 400]]}]}
EXAMPLES: tuple[tuple[str, dict[str, Any]], ...] = (
    ("movement", MOVEMENT),
    ("movement", STANDING),
    ("cutter", LASER),
    ("cutter", PRESS),
    ("settings", SETTINGS),
    ("settings", IN_SECONDS),
    ("sheet-job", JOB),
    ("sheet-job", OUTLINED),
)
