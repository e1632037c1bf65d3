"""Runs the program under test on a model file."""
import json
import os
import shlex
import subprocess


class NoSheet(Exception):
    """The program gave no sheet; the text says what it did instead."""


class Program:
    def __init__(self, command):
        self.command = [os.path.abspath(w) if os.path.exists(w) else w for w in shlex.split(command)]

    def run(self, *args, timeout=20, **more):
        return subprocess.run(self.command + list(args), stdout=subprocess.PIPE, stderr=subprocess.PIPE, timeout=timeout, **more)

    def sheet(self, path, timeout=20, search="no"):
        """The JSON sheet of a file. Raises NoSheet."""
        try:
            p = self.run("sheet", path, "--as", "json", "--search", search, timeout=timeout)
        except subprocess.TimeoutExpired:
            raise NoSheet(f"no answer in {timeout} s") from None
        except OSError as x:
            raise NoSheet(str(x)) from None
        err = p.stderr.decode("utf-8", "replace")
        if crashed(p.returncode, err):
            raise NoSheet(f"crashed ({p.returncode}): {err.strip()[:300]}")
        try:
            sheet = json.loads(p.stdout.decode("utf-8"))
        except ValueError as x:
            raise NoSheet(f"no JSON ({x}), exit {p.returncode}: {err.strip()[:300]}") from None
        return sheet


def crashed(code, err):
    return code < 0 or code in (101, 134, 139) or "panicked at" in err


def errors(sheet):
    return [f["message"] for f in sheet.get("findings", []) if f.get("severity") == "error"]


def by_name(rows):
    return {r["name"]: r for r in rows or []}
