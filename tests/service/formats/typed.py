"""Tables whose columns have types, for tests: written and read by pyarrow."""

import io

import pyarrow as pa
import pyarrow.parquet as pq

TYPED = ("arrow", "parquet")


def written(table, form, **options):
    """The bytes of a pyarrow table; options of the writer."""
    sink = io.BytesIO()
    if form == "parquet":
        pq.write_table(table, sink, **options)
    else:
        with pa.ipc.new_stream(sink, table.schema, options=options.get("options")) as writer:
            writer.write_table(table, options.get("max_chunksize"))
    return sink.getvalue()


def read_typed(body, form):
    """The whole table."""
    if form == "parquet":
        return pq.read_table(io.BytesIO(body))
    return pa.ipc.open_stream(body).read_all()


def typed_samples():
    """The sample of every typed format: text as a logger wrote it, in columns of text."""
    table = pa.table({
        "time": ["2026-05-04T06:00:00Z", "2026-05-04T07:00:00Z", None, "2026-05-04T08:00:00Z"],
        "note": ['a, "b"', "", None, "ü"],
        "apparent_permittivity": ["17.20", "NA", None, "1e999"],
        "temperature": ["14", "warm", None, ""],
    })  # fmt: skip
    return {form: written(table, form) for form in TYPED}
