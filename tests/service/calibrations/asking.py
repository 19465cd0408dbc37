"""An invented soil's pairs, and how they are asked about."""

import copy

PERMITTIVITY = [3.9, 4.6, 8.1, 9.0, 13.6, 14.7, 20.3, 21.6, 27.4, 28.9, 4.2, 13.9]
WATER = [0.057, 0.071, 0.153, 0.166, 0.248, 0.259, 0.330, 0.348, 0.416, 0.427, 0.064, 0.251]
LEVELS = ["a", "a", "b", "b", "c", "c", "d", "d", "e", "e", "a", "c"]
COLUMNS = {"pairs": {"apparent_permittivity": PERMITTIVITY, "water_content": WATER}}
ROWS = {
    "pairs": [
        {"apparent_permittivity": k, "water_content": w}
        for k, w in zip(PERMITTIVITY, WATER, strict=True)
    ]
}


def asked(server, body, status=200):
    answer = server.client.post("/v1/calibrations", json=body)
    assert answer.status_code == status, answer.text
    return answer.json()


def with_pairs(body=None, **columns):
    """The body with other columns of pairs."""
    changed = copy.deepcopy(body or COLUMNS)
    changed["pairs"] |= columns
    return changed
