"""The one family of input errors: what went wrong, where, why, and what to do about it."""

from __future__ import annotations


class InputError(ValueError):
    """An input that cannot be used, said so that a person can mend it.

    Parameters
    ----------
    what : what could not be done, or what was got ("transmittance of 41.2 at 520 nm").
    why : the rule that it breaks ("a transmittance lies between 0 and 1.2").
    do : what to do next ("give --quantity, or divide by 100").
    where : file with line and column, sample, option or argument; empty when there is no place.
    """

    def __init__(self, what: str, *, why: str = "", do: str = "", where: str = "") -> None:
        super().__init__(what, why, do, where)
        self.what, self.why, self.do, self.where = what, why, do, where

    def at(self, where: str) -> InputError:
        """The same error with its place put in front, as a caller learns which file it was."""
        place = f"{where}, {self.where}" if self.where else where
        return type(self)(self.what, why=self.why, do=self.do, where=place)

    def as_dict(self) -> dict[str, str]:
        """The four parts, as ``--json`` prints a refusal."""
        return {"what": self.what, "where": self.where, "why": self.why, "do": self.do}

    def __str__(self) -> str:
        head = f"{self.where}: {self.what}" if self.where else self.what
        line = ": ".join(part for part in (head, self.why) if part)
        return " ".join((f"{line}. {self.do[0].upper()}{self.do[1:]}" if self.do else line).split())


def unknown_name(kind: str, name: str, valid: list[str] | tuple[str, ...]) -> InputError:
    """The refusal of a name that is not known, listing the names that are."""
    return InputError(f"unknown {kind} {name!r}", why=f"known are {', '.join(valid)}", do="use one of these")


def unreadable(path: str, error: OSError) -> InputError:
    """The refusal of a file that the system does not let us read."""
    return InputError("cannot be read", where=path, why=error.strerror or "", do="check the name")
