"""The program: one small file a verb, and no logic of its own."""

from __future__ import annotations

import gc
from typing import Any

import click

from loadpath import __version__

VERBS = {
    "issue": ("loadpath.cli.issue", "issue"),
    "audit": ("loadpath.cli.audit", "audit"),
    "guide": ("loadpath.cli.guide", "guide"),
}


class _Verbs(click.Group):
    """Loads a verb's module when the verb is used."""

    def list_commands(self, context: click.Context) -> list[str]:
        return list(VERBS)

    def get_command(self, context: click.Context, name: str) -> click.Command | None:
        if name not in VERBS:
            return None
        from importlib import import_module

        module, attribute = VERBS[name]
        command: Any = getattr(import_module(module), attribute)
        return command  # type: ignore[no-any-return]


@click.group(cls=_Verbs, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="loadpath")
def main() -> None:
    """Calc sheets in, documents that a checker can follow out.

    Results are to be checked by a competent person; local codes and licensed practice govern.

    Exit codes: 0 done, 1 a sheet has errors, 2 wrong use, 3 a criterion is not satisfied or not shown.
    """
    # a run makes many small records and ends soon: looking for circles among them would only cost time
    gc.set_threshold(200_000, 20, 20)
