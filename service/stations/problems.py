"""What requests about stored things are refused for, beside what any request is."""

from service.schemas.problem import Problem


class Conflicted(Problem, status=409, slug="conflict"):
    """Something else that is stored stands in the way.

    The detail names it; change that first.
    """


class PreconditionFailed(Problem, status=412, slug="changed-meanwhile"):
    """It was changed since you read it.

    Read it again, look at the difference, and send `If-Match` with its current `ETag`.
    """


class PreconditionRequired(Problem, status=428, slug="if-match-needed"):
    """Say which revision you mean to replace.

    Send `If-Match` with the `ETag` that GET answers, so that nobody's change is lost unseen; the
    same content as is stored needs none.
    """


class TooManyRequests(Problem, status=429, slug="too-many-requests"):
    """Requests come more often than was agreed for their key.

    Ask again after `Retry-After` seconds; `RateLimit` and `RateLimit-Policy` tell what is left.
    """
