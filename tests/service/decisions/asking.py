"""Decisions asked for over HTTP, and bodies with one thing changed."""

import copy


def ask(server, path, body, status=200):
    answer = server.client.post(f"/v1/{path}", json=body)
    assert answer.status_code == status, answer.text
    return answer.json()


def codes(answer):
    return {advisory["code"] for advisory in answer["advisories"]}


def changed(body, place, value):
    """The body with one thing changed, or left out where the value is None."""
    body = copy.deepcopy(body)
    here = body
    for step in place[:-1]:
        here = here.setdefault(step, {}) if isinstance(here, dict) else here[step]
    if value is None:
        del here[place[-1]]
    else:
        here[place[-1]] = value
    return body
