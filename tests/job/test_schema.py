"""The JSON Schema of the job file."""

import json

from rateloom.job import job_schema
from rateloom.job.schema import BLOCKS, EntityEntry, JobFile, ReactionEntry


def test_the_schema_is_json_and_knows_every_key_as_it_is_written() -> None:
    schema = json.loads(json.dumps(job_schema()))
    assert set(schema["properties"]) == set(JobFile.model_fields)
    assert set(schema["$defs"]["EntityEntry"]["properties"]) == set(EntityEntry.model_fields)
    assert set(schema["$defs"]["GridEntry"]["properties"]) == {"from", "to", "count", "spacing"}
    assert schema["required"] == ["temperatures"]
    assert schema["additionalProperties"] is False
    assert schema["properties"]["species"]["propertyNames"]["pattern"].startswith("^[A-Za-z0-9(]")


def test_every_block_inside_another_is_known_to_the_messages() -> None:
    used = {name for model in (JobFile, EntityEntry, ReactionEntry) for name in model.model_fields}
    assert set(BLOCKS) <= used
