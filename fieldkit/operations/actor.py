"""Who asks for an operation, and what their roles let them do."""

from __future__ import annotations

from dataclasses import dataclass

from fieldkit.errors import Refusal

#: closed; what each may do is said where it is required
ROLES = ("technician", "supervisor", "administrator", "writer")


@dataclass(frozen=True)
class Actor:
    """A person as they stand now: id, name, roles."""

    id: str
    name: str
    roles: tuple[str, ...]

    def may(self, *roles: str) -> bool:
        return any(role in self.roles for role in roles)


#: the command line on the server itself: whoever can run it already holds the data folder
HOUSE = Actor("fieldkit", "fieldkit on the server", ROLES)


def require(actor: Actor, *roles: str) -> None:
    """Raises Refusal not-allowed unless the actor has one of the roles."""
    if not actor.may(*roles):
        wanted = " or ".join(roles)
        raise Refusal(
            "not-allowed",
            f"This needs the role {wanted}; {actor.name} is {', '.join(actor.roles) or 'without a role'}.",
        )
