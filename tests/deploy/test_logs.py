"""Log lines are JSON and carry nothing that was typed."""

import json
import logging
import sys

from deploy.logs import JsonLine


def line_of(message: str, *arguments: object, error: BaseException | None = None, **extra: object) -> dict[str, object]:
    exc_info = (type(error), error, error.__traceback__) if error else None
    record = logging.LogRecord("plant.intake", logging.ERROR, __file__, 1, message, arguments, exc_info)
    record.__dict__.update(extra)
    return json.loads(JsonLine().format(record))


def test_a_line_says_when_where_and_what():
    line = line_of("refused %s", "line 7", status_code=422)
    assert line["message"] == "refused line 7"
    assert line["logger"] == "plant.intake"
    assert line["level"] == "ERROR"
    assert line["status"] == 422
    assert str(line["time"]).endswith("+00:00")


def test_an_error_is_named_without_its_text():
    try:
        raise ValueError("Key (email)=(olga@works.example) already exists")
    except ValueError:
        line = line_of("failed", error=sys.exc_info()[1])
    assert line["error"] == "ValueError"
    assert "olga" not in json.dumps(line)
    assert "test_logs.py" in str(line["where"])


def test_a_message_of_several_lines_stays_one_line():
    record = logging.LogRecord("x", logging.INFO, __file__, 1, "one\ntwo", (), None)
    assert "\n" not in JsonLine().format(record)
