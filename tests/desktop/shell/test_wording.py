import pytest

from plumbrule_core.documents.faults import Fault
from plumbrule_core.documents.plan import Forecast
from plumbrule_desktop.state.amounts import energy
from plumbrule_desktop.state.difference import fault_words
from plumbrule_desktop.state.wording import duration, forecast_details, forecast_words


@pytest.mark.parametrize(
    ("seconds", "words"),
    [
        (0.2, "less than 1 s"),
        (8.4, "8 s"),
        (360, "6 min"),
        (9000, "2.5 h"),
        (3 * 86400, "3 days"),
    ],
)
def test_a_time_is_said_as_people_say_it(seconds: float, words: str) -> None:
    assert duration(seconds) == words


def test_a_forecast_names_time_and_memory_and_its_details_name_the_range() -> None:
    forecast = Forecast(seconds=360, seconds_low=180, seconds_high=720, memory_mb=1200, disk_mb=500)
    assert forecast_words(forecast) == "about 6 min, 1.2 GB"
    details = forecast_details(forecast)
    assert "between 3 min and 12 min" in details
    assert "500 MB" in details


def test_an_answer_shows_no_more_digits_than_its_uncertainty_leaves() -> None:
    assert energy(941.2345, "kJ/mol", 6.31) == "941.2 \u00b1 6.3 kJ/mol"
    assert energy(941.2345, "kJ/mol", 23.0) == "941 \u00b1 23 kJ/mol"


def test_an_answer_without_uncertainty_claims_none() -> None:
    assert energy(-76.241308, "hartree") == "\u221276.24131 hartree"


def test_a_fault_is_a_sentence_without_the_key_of_a_file() -> None:
    asked = Fault(where="question", says="no question is asked yet")
    assert fault_words(asked) == "No question is asked yet."
    charge = Fault(where="species.water.charge", says="must be a whole number")
    assert fault_words(charge) == "Water, charge: must be a whole number."
