"""Value <-> message, both directions side by side; the only rooms that see messages import this one."""

from interwind.codec.json import value_from_json, value_to_json
from interwind.model import json_form

json_form.register(value_to_json, value_from_json)
