"""Tables whose columns have types: Arrow streams and Parquet files.

pyarrow is loaded with the first of them, or when a server starts: it is large.
"""
