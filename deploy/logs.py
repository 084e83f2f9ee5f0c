"""Log lines as JSON, without what people typed."""

import json
import logging
import traceback
from datetime import UTC, datetime


class JsonLine(logging.Formatter):
    """One JSON object a line: time, level, logger, message, and for an error its type and where it happened.

    An exception's own text is left out: databases quote the refused row in it. So is the query of an address.
    """

    def format(self, record: logging.LogRecord) -> str:
        line: dict[str, object] = {
            "time": datetime.fromtimestamp(record.created, UTC).isoformat(timespec="milliseconds"),
            "level": record.levelname,
            "logger": record.name,
            "message": record.getMessage(),
        }
        status = getattr(record, "status_code", None)
        if status is not None:
            line["status"] = status
        if record.exc_info and record.exc_info[0]:
            line["error"] = record.exc_info[0].__name__
            line["where"] = [
                f"{frame.filename}:{frame.lineno} {frame.name}" for frame in traceback.extract_tb(record.exc_info[2])[-12:]
            ]
        return json.dumps(line, ensure_ascii=False)
