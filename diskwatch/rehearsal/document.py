"""An invented drive's answer as the JSON document that smartctl gives; the real reader takes it from there."""

from typing import Any

from diskwatch.records import SelfTest
from diskwatch.rehearsal.told import Logged, Row, Told

OUI = 0xFFFFF0
"""In the place of a maker's number in world-wide names; nobody's, as in the recorded twins of the tests."""


def document(told: Told) -> dict[str, Any]:
    """The document; keys as smartctl 7.3 writes them, those of the NVMe error log as 7.4 does (from memory)."""
    common: dict[str, Any] = {
        "model_name": told.model,
        "serial_number": told.serial,
        "firmware_version": told.firmware,
        "user_capacity": {"bytes": told.capacity},
        "smart_support": {"available": True, "enabled": True},
        "smart_status": {"passed": told.passed},
        "temperature": {"current": told.celsius},
        "power_on_time": {"hours": told.hours},
        "power_cycle_count": told.cycles,
    }
    return common | (_nvme(told) if told.nvme else _ata(told))


def _ata(told: Told) -> dict[str, Any]:
    return {
        "ata_version": {"string": "ACS-3"},
        "in_smartctl_database": True,
        "wwn": {"naa": 5, "oui": OUI, "id": told.number},
        "logical_block_size": 512,
        "rotation_rate": told.rpm,
        "ata_sct_status": {"temperature": {"op_limit_max": told.limit}},
        "ata_smart_attributes": {"table": [_row(row) for row in told.rows]},
        "ata_smart_error_log": {"summary": {"count": 0}},
        "ata_smart_self_test_log": {"standard": {"table": [_ata_test(test) for test in told.tests]}},
    }


def _row(row: Row) -> dict[str, Any]:
    return {
        "id": row.number,
        "name": row.name,
        "value": row.value,
        "worst": row.worst,
        "thresh": row.threshold,
        "when_failed": row.failing,
        "flags": {"prefailure": row.prefail},
        "raw": {"value": row.raw, "string": str(row.raw)},
    }


def _ata_test(test: SelfTest) -> dict[str, Any]:
    row: dict[str, Any] = {
        "type": {"string": test.name},
        "status": {"string": test.result, "passed": test.passed},
        "lifetime_hours": test.hours,
    }
    return row if test.lba is None else row | {"lba": test.lba}


def _nvme(told: Told) -> dict[str, Any]:
    return {
        "nvme_version": {"string": "1.4"},
        "nvme_total_capacity": told.capacity,
        "nvme_namespaces": [{"id": 1, "eui64": {"oui": OUI, "ext_id": told.number}}],
        "nvme_composite_temperature_threshold": {"warning": told.limit, "critical": told.limit + 6},
        "nvme_smart_health_information_log": dict(told.log),
        "nvme_error_information_log": {
            "size": 64,
            "read": 16,
            **({"table": [_error(one) for one in told.errors]} if told.errors else {}),
        },
        "nvme_self_test_log": {"table": [_nvme_test(test) for test in told.tests]},
    }


def _error(one: Logged) -> dict[str, Any]:
    status = {"value": one.status, "status_code_type": one.status >> 8 & 0x7, "status_code": one.status & 0xFF}
    row: dict[str, Any] = {"error_count": one.count, "status_field": status}
    return row if one.lba is None else row | {"lba": {"value": one.lba}}


def _nvme_test(test: SelfTest) -> dict[str, Any]:
    row: dict[str, Any] = {
        "self_test_code": {"string": test.name},
        "self_test_result": {"string": test.result},
        "power_on_hours": test.hours,
    }
    return row if test.lba is None else row | {"lba": test.lba}
