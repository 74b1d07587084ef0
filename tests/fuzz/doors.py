"""The doors that are fuzzed, by name."""

from tests.fuzz import cutter_door, drawing_door, movement_door, settings_door, tune_door

DOORS = {
    module.DOOR.name: module.DOOR for module in (tune_door, drawing_door, movement_door, cutter_door, settings_door)
}
