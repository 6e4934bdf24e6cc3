import pytest

from pairrules.pairing.net_roles import is_ground_name, is_supply_name


@pytest.mark.parametrize(
    "name",
    [
        "GND",
        "AGND",
        "DGND",
        "PGND",
        "GNDA",
        "gnd",
        "GND1",
        "VSS",
        "VSSA",
        "0V",
        "EARTH",
        "CHASSIS",
        "SHIELD",
        "GND_ISO",
    ],
)
def test_grounds(name: str) -> None:
    assert is_ground_name(name)
    assert is_supply_name(name)


@pytest.mark.parametrize(
    "name", ["GND_SENSE", "SHIELD_DET", "10V", "LEGEND", "BACKGROUND", "SGNDX1Y", "", "VDD", "GND_P"]
)
def test_no_grounds(name: str) -> None:
    assert not is_ground_name(name)


@pytest.mark.parametrize(
    "name",
    [
        "VDD",
        "VDDIO",
        "AVDD",
        "VCC_A",
        "+3V3",
        "+3.3V",
        "1.8V",
        "VDD_IO",
        "3V3_A",
        "SENSOR_5V",
        "VBAT",
        "-12V",
        "VTT",
        "VREF",
    ],
)
def test_supplies(name: str) -> None:
    assert is_supply_name(name)


@pytest.mark.parametrize("name", ["CLK_1V8", "VDD_SENSE", "SENSE_VDD", "VIN", "TX", "IN_P", "VIDEO", "CAN_5V", "V"])
def test_no_supplies(name: str) -> None:
    assert not is_supply_name(name)
