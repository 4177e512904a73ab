"""Tables of questions with values of any kind: a line, never a traceback."""

from datetime import date
from typing import get_args

import pytest

from fieldplan.campaign.model import Objective
from fieldplan.campaign.questions import MODULES, table_of
from tests.unit.campaign.files import bent, inspected
from tests.unit.campaign.test_questions_of_shares_and_change import MEAN

VALUES = ("true", "-1", "0", "1", "2", "0.5", "1e300", "nan", '""', '"FILL IN"', "[]", "[1, 2]",
          "{ a = 1 }", date(2026, 1, 2).isoformat())  # fmt: skip
KEYS = [
    (question, key)
    for question in MODULES
    for key in get_args(Objective.model_fields[table_of(question)].annotation)[0].model_fields
]


@pytest.mark.parametrize(("question", "key"), KEYS)
def test_values_of_any_kind_get_a_line(tmp_path, question: str, key: str) -> None:
    """Every key of every table, alone and with its neighbours, takes whatever is typed."""
    others = [other for asked, other in KEYS if asked == question and other != key]
    for value in VALUES:
        for beside in ([], others):
            lines = "\n".join(f"{name} = {value}" for name in [key, *beside])
            table = f'question = "{question}"\n[objective.{table_of(question)}]\n{lines}'
            found = inspected(tmp_path, bent((MEAN, table)))
            assert found.problems or found.fill_in or found.campaign is not None
