from diskwatch.machine.power import on_battery
from tests.machine.trees import Tree


def supply(tree: Tree, name: str, **files: str):
    for key, content in files.items():
        tree.put(tree.sys / "class/power_supply" / name / key, content)


def test_a_computer_without_a_battery_never_runs_on_one(tree: Tree):
    assert not on_battery(tree.sys)


def test_a_battery_that_empties_is_what_it_runs_on(tree: Tree):
    supply(tree, "AC", type="Mains", online="0")
    supply(tree, "BAT0", type="Battery", status="Discharging", present="1")
    assert on_battery(tree.sys)


def test_with_the_plug_in_it_does_not(tree: Tree):
    supply(tree, "AC", type="Mains", online="1")
    supply(tree, "BAT0", type="Battery", status="Discharging", present="1")
    assert not on_battery(tree.sys)


def test_power_over_usb_is_power_from_outside(tree: Tree):
    supply(tree, "ucsi", type="USB", online="1")
    supply(tree, "BAT0", type="Battery", status="Not charging")
    assert not on_battery(tree.sys)


def test_the_battery_of_a_mouse_does_not_count(tree: Tree):
    supply(tree, "mouse", type="Battery", scope="Device", status="Discharging")
    assert not on_battery(tree.sys)


def test_a_full_battery_without_a_word_of_the_plug_is_not_running_down(tree: Tree):
    supply(tree, "BAT0", type="Battery", status="Full")
    assert not on_battery(tree.sys)


def test_a_battery_that_was_taken_out_does_not_count(tree: Tree):
    supply(tree, "BAT1", type="Battery", status="Discharging", present="0")
    assert not on_battery(tree.sys)
