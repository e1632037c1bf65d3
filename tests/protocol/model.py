"""The protocol's official model as JSON schemas. Strict: a field that the model does not have is an error."""

import functools
import json
import pathlib

from jsonschema import Draft7Validator

PATH = pathlib.Path(__file__).resolve().parent / "metaModel-3.17.json"
BASES = {
    "string": {"type": "string"},
    "DocumentUri": {"type": "string", "pattern": "^[a-zA-Z][a-zA-Z0-9+.-]*:"},
    "URI": {"type": "string"},
    "RegExp": {"type": "string"},
    "integer": {"type": "integer", "minimum": -(2**31), "maximum": 2**31 - 1},
    "uinteger": {"type": "integer", "minimum": 0, "maximum": 2**31 - 1},
    "decimal": {"type": "number"},
    "boolean": {"type": "boolean"},
    "null": {"type": "null"},
}
FREE = {"LSPAny": {}, "LSPObject": {"type": "object"}, "LSPArray": {"type": "array"}}


class Model:
    """Knows what each request, its result and each notification may look like."""

    def __init__(self):
        model = json.loads(PATH.read_text())
        self.structures = {s["name"]: s for s in model["structures"]}
        self.enumerations = {e["name"]: e for e in model["enumerations"]}
        self.aliases = {a["name"]: a for a in model["typeAliases"]}
        self.requests = {r["method"]: r for r in model["requests"]}
        self.notifications = {n["method"]: n for n in model["notifications"]}
        self.definitions = {}

    def fields(self, structure):
        out = {}
        for base in structure.get("extends", []) + structure.get("mixins", []):
            out.update(self.fields(self.structures[base["name"]]))
        out.update({p["name"]: p for p in structure["properties"]})
        return out

    def record(self, fields):
        return {
            "type": "object",
            "properties": {name: self.schema(p["type"]) for name, p in fields.items()},
            "required": [name for name, p in fields.items() if not p.get("optional")],
            "additionalProperties": False,
        }

    def named(self, name):
        if name in FREE:
            return FREE[name]
        if name not in self.definitions:
            self.definitions[name] = {}  # it may contain itself
            if name in self.structures:
                schema = self.record(self.fields(self.structures[name]))
            elif name in self.enumerations:
                e = self.enumerations[name]
                own = {"enum": [v["value"] for v in e["values"]]}
                schema = self.schema(e["type"]) if e.get("supportsCustomValues") else own
            else:
                schema = self.schema(self.aliases[name]["type"])
            self.definitions[name] = schema
        return {"$ref": f"#/definitions/{name}"}

    def schema(self, t):
        kind = t["kind"]
        if kind == "base":
            return BASES[t["name"]]
        if kind == "reference":
            return self.named(t["name"])
        if kind == "array":
            return {"type": "array", "items": self.schema(t["element"])}
        if kind == "map":
            return {"type": "object", "additionalProperties": self.schema(t["value"])}
        if kind == "or":
            return {"anyOf": [self.schema(i) for i in t["items"]]}
        if kind == "and":
            return self.record({n: p for i in t["items"] for n, p in self.fields(self.structures[i["name"]]).items()})
        if kind == "tuple":
            items = [self.schema(i) for i in t["items"]]
            return {"type": "array", "items": items, "minItems": len(items), "maxItems": len(items)}
        if kind == "literal":
            return self.record({p["name"]: p for p in t["value"]["properties"]})
        return {"const": t["value"]}

    @functools.cache
    def validator(self, method, part):
        spec = self.requests.get(method) or self.notifications[method]
        schema = {"allOf": [self.schema(spec[part])]} if part in spec else {"enum": [None]}
        return Draft7Validator({**schema, "definitions": self.definitions})

    def errors(self, method, part, value):
        """What is wrong with the params or the result of a method, in words."""
        found = self.validator(method, part).iter_errors(value)
        return [f"{method} {part}: /{'/'.join(map(str, e.absolute_path))} {e.message[:200]}" for e in found]


@functools.cache
def model():
    return Model()
