# Two stages: the second has no compiler and runs as nobody in particular.
FROM python:3.13-slim AS build
WORKDIR /src
COPY pyproject.toml README.md ./
COPY models models
COPY service service
RUN python -m venv /opt/venv && /opt/venv/bin/pip install --no-cache-dir .

FROM python:3.13-slim
COPY --from=build /opt/venv /opt/venv
RUN mkdir /data && chown 10001:10001 /data
USER 10001:10001
ENV PATH=/opt/venv/bin:$PATH PYTHONUNBUFFERED=1 OPENBLAS_NUM_THREADS=1 \
    GLEYLINE_HOST=0.0.0.0 GLEYLINE_PORT=8000 GLEYLINE_DATA=/data
VOLUME /data
EXPOSE 8000
STOPSIGNAL SIGTERM
HEALTHCHECK --interval=10s --timeout=3s --start-period=5s \
    CMD ["python", "-c", "import urllib.request as u; u.urlopen('http://127.0.0.1:8000/livez', timeout=2)"]
# Bound to every interface the service asks for a key: make one first with
#   docker run --rm -v gleyline:/data IMAGE gleyline key add --scope read
CMD ["gleyline", "serve"]
