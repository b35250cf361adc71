from dataclasses import replace

import pytest

from diskwatch.machine.stacks import Stack
from diskwatch.machine.zfs import pool_on, pools, states
from tests.machine.trees import Tree

GIVEN = Stack(names=frozenset({"sda"}), numbers=frozenset({"8:0"}), labels=frozenset({"zfs-00c0ffee00c0ffee"}))


def test_pools_are_those_that_have_a_state_and_only_a_working_one_answers(tree: Tree):
    tree.zfs("tank")
    tree.zfs("half", "DEGRADED")
    tree.zfs("stuck", "SUSPENDED")
    (tree.proc / "spl/kstat/zfs/arcstats").write_text("no pool")
    assert pools(tree.proc) == {"half": True, "stuck": False, "tank": True}


def test_the_state_of_each_pool_is_told_in_the_modules_word(tree: Tree):
    tree.zfs("tank")
    tree.zfs("half", "DEGRADED")
    assert states(tree.proc) == {"half": "DEGRADED", "tank": "ONLINE"}


def test_a_machine_without_zfs_has_no_pool(tree: Tree):
    assert pools(tree.proc) == {}
    assert pool_on(GIVEN, {}) is None


def test_the_only_pool_lies_on_the_drives_that_zfs_was_given():
    assert pool_on(GIVEN, {"tank": True}) == "tank"


def test_which_of_two_pools_it_is_stays_open():
    assert pool_on(GIVEN, {"tank": True, "vault": True}) is None


@pytest.mark.parametrize("label", ["zfs", "zfs-boot", "my zfs-00c0ffee00c0ffee", "zfs-00C0FFEE00C0FFEE"])
def test_a_name_that_a_person_gave_proves_nothing(label: str):
    assert pool_on(replace(GIVEN, labels=frozenset({label})), {"tank": True}) is None
