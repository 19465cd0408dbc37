"""An invented farm: a loam, two probes, a station; and Topp's equation to check it by."""

DAY = "2026-05-04"


def put(client, kind, name, body, **headers):
    return client.put(f"/v1/{kind}s/{name}", json=body, headers=headers)


def furnish(client, station="north-1"):
    put(client, "soil", "loam", {"texture": "loam", "bulk_density": 1.42,
                                 "mixing_model": "topp-1980"})  # fmt: skip
    for probe in ("p1", "p2"):
        put(client, "probe", probe, {"frequency": 1.0e9, "apparent_permittivity_u": 0.3})
    answer = put(client, "station", station, {
        "position": {"longitude": 9.9, "latitude": 51.5}, "zone": "Europe/Berlin",
        "sentinels": [-9999, 7999],
        "installations": [
            {"probe": "p1", "soil": "loam", "depth": 0.2, "from": "2026-01-01T00:00:00Z"},
            {"probe": "p2", "soil": "loam", "depth": 0.4, "from": "2026-01-01T00:00:00Z"},
        ],
    })  # fmt: skip
    assert answer.status_code in {200, 201}, answer.text


def reading(minute, permittivity=17.2, probe="p1", day=DAY, **more):
    time = f"{day}T{minute // 60:02}:{minute % 60:02}:00Z"
    return {"time": time, "probe": probe, "apparent_permittivity": permittivity, **more}


def post(client, readings, station="north-1", **more):
    return client.post(f"/v1/stations/{station}/readings", json={"readings": readings, **more})


def topp(permittivity):
    """Topp, Davis and Annan (1980), Eq. 7."""
    k = permittivity
    return -5.3e-2 + 2.92e-2 * k - 5.5e-4 * k**2 + 4.3e-6 * k**3
