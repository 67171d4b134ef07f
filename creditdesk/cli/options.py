"""The commands and their options; what carries a command out is imported when it is run."""

import argparse
from collections.abc import Callable
from importlib import import_module
from pathlib import Path
from typing import TypeAlias

import creditdesk

Run = Callable[[argparse.Namespace], int]
Commands: TypeAlias = "argparse._SubParsersAction[argparse.ArgumentParser]"  # noqa: SLF001  the type has no other name


def build_parser() -> argparse.ArgumentParser:
    """Return the parser of the whole command line."""
    parser = argparse.ArgumentParser(
        prog="creditdesk",
        description="Assess one borrower at a time. Without a command the window opens.",
        epilog="Exit codes: 0 done, 1 the answer is no, 2 wrong usage, 3 unusable file, 70 our own bug.",
    )
    parser.add_argument("--version", action="version", version=f"creditdesk {creditdesk.__version__}")
    every = parser.add_subparsers(title="commands", required=True, metavar="COMMAND")
    _open(every)
    _assess(every)
    _memo(every)
    _countersign(every)
    _verify(every)
    _identity(every)
    _fit(every)
    _score(every)
    _convert(every)
    _picture(every)
    _schema(every)
    return parser


def command_named(name: str) -> Run:
    """Import what carries a command out: ``module.function`` of this package, as the parser leaves it in ``run``."""
    module, function = name.split(".")
    found: Run = getattr(import_module(f"creditdesk.cli.{module}"), function)
    return found


def _command(every: Commands, name: str, run: str, words: str) -> argparse.ArgumentParser:
    parser = every.add_parser(name, help=words, description=words)
    parser.set_defaults(run=run)
    return parser


def _house(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--housebook", type=Path, metavar="DIR", help="folder of the house book (default: shipped)")


def _key(parser: argparse.ArgumentParser, *, required: bool) -> None:
    parser.add_argument("--identity", type=Path, required=required, metavar="ID.p12", help="signing identity")
    parser.add_argument(
        "--passphrase-env", required=required, metavar="VAR", help="environment variable that holds the passphrase"
    )


def _open(every: Commands) -> None:
    parser = _command(every, "open", "opening.open_window", "open the window on a case")
    parser.add_argument("case", type=Path, nargs="?", metavar="CASE", help=".deskcase or .case.toml")
    _house(parser)


def _assess(every: Commands) -> None:
    parser = _command(every, "assess", "commands.assess", "print where the borrower stands")
    parser.add_argument("case", type=Path, metavar="CASE")
    parser.add_argument("--model", metavar="NAME|PATH", help="apply this model in place of the case's lead model")
    parser.add_argument("--json", action="store_true", help="print JSON and nothing else")
    _house(parser)


def _memo(every: Commands) -> None:
    parser = _command(every, "memo", "commands.memo", "write the memo, signed by the preparer")
    parser.add_argument("case", type=Path, metavar="CASE")
    parser.add_argument("--out", type=Path, required=True, metavar="MEMO.pdf")
    parser.add_argument("--unsigned", action="store_true", help="write it without a signature")
    _key(parser, required=False)
    _house(parser)


def _countersign(every: Commands) -> None:
    parser = _command(every, "countersign", "commands.countersign", "add the approver's decision and signature")
    parser.add_argument("memo", type=Path, metavar="MEMO.pdf")
    parser.add_argument(
        "--decision", required=True, choices=("approve", "approve_with_conditions", "decline", "return")
    )
    parser.add_argument("--conditions", default="", metavar="TEXT")
    parser.add_argument("--out", type=Path, metavar="FILE", help="default: replace the memo")
    _key(parser, required=True)


def _verify(every: Commands) -> None:
    parser = _command(every, "verify", "commands.verify", "check signatures and attachments of a memo and re-run it")
    parser.add_argument("memo", type=Path, metavar="MEMO.pdf")
    parser.add_argument("--require", default="", metavar="known,countersigned", help="what must hold beyond intact")
    parser.add_argument("--json", action="store_true", help="print JSON and nothing else")
    _house(parser)


def _identity(every: Commands) -> None:
    parser = every.add_parser("identity", help="make a signing identity", description="make a signing identity")
    parts = parser.add_subparsers(required=True, metavar="new")
    new = _command(parts, "new", "commands.new_identity", "make a self-signed signing identity")
    new.add_argument("--name", required=True, help="the signer's name, as it will stand in the memo")
    new.add_argument("--out", type=Path, required=True, metavar="ID.p12")
    new.add_argument("--passphrase-env", required=True, metavar="VAR")
    new.add_argument("--kind", choices=("ecdsa-p256", "rsa-3072"), default="ecdsa-p256")


def _fit(every: Commands) -> None:
    parser = _command(every, "fit", "commands.fit", "fit a model on a sample and write its model file")
    parser.add_argument("sample", type=Path, metavar="SAMPLE.csv")
    parser.add_argument("--target", required=True, metavar="COLUMN", help="1 for default, 0 for none")
    parser.add_argument("--method", choices=("ml", "firth"), default="ml")
    parser.add_argument("--recipe", type=Path, metavar="FILE", help="treatments, rules and texts (TOML)")
    parser.add_argument("--base-rate", type=float, metavar="P", help="shift the PD to this default rate")
    parser.add_argument("--out", type=Path, required=True, metavar="MODEL.toml")


def _score(every: Commands) -> None:
    parser = _command(every, "score", "commands.score", "score many rows of ratios at once")
    parser.add_argument("sample", type=Path, metavar="SAMPLE.csv")
    parser.add_argument("--model", required=True, metavar="NAME|PATH")
    parser.add_argument("--out", type=Path, required=True, metavar="SCORED.csv")
    _house(parser)


def _convert(every: Commands) -> None:
    parser = _command(every, "convert", "commands.convert", "turn .case.toml into .deskcase or back, or into .xlsx")
    parser.add_argument("source", type=Path, metavar="IN")
    parser.add_argument("target", type=Path, metavar="OUT")
    _house(parser)


def _picture(every: Commands) -> None:
    parser = _command(every, "picture", "commands.picture", "write a picture of one sheet of the window")
    parser.add_argument("sheet", metavar="SHEET", help="a sheet's name, or standing for Standing with the window alone")
    parser.add_argument("case", type=Path, metavar="CASE")
    parser.add_argument("--out", type=Path, required=True, metavar="PAGE.png")
    parser.add_argument("--theme", choices=("light", "dark"), default="light")
    parser.add_argument("--size", default="1440x900", metavar="WIDTHxHEIGHT", help="as seen at 100 %% (1440x900)")
    parser.add_argument("--scale", type=int, choices=(1, 2, 3), default=1, help="pixels per dot of that size (1)")
    _house(parser)


def _schema(every: Commands) -> None:
    parser = _command(every, "schema", "commands.schema", "print the JSON Schema of the exchange file")
    _house(parser)
