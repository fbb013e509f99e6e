# Cadencewright in a container. It runs against an outside Postgres named by
# DATABASE_URL (14 or newer, with the btree_gist extension available):
#
#   docker build -t cadencewright .
#   docker run -p 8080:8080 -e DATABASE_URL=postgres://… cadencewright
#
# One binary without C libraries; time zones are built in.
FROM golang:1.26-bookworm AS build
WORKDIR /src
COPY go.mod go.sum ./
RUN go mod download
COPY cmd ./cmd
COPY server ./server
COPY scheduler ./scheduler
COPY astro ./astro
COPY web ./web
COPY migrations ./migrations
RUN CGO_ENABLED=0 go build -trimpath -ldflags="-s -w" -o /out/cadencewright ./cmd/cadencewright

FROM debian:bookworm-slim AS run
RUN apt-get update \
    && apt-get install -y --no-install-recommends ca-certificates \
    && rm -rf /var/lib/apt/lists/* \
    && useradd --system --uid 10001 --home-dir /nonexistent --shell /usr/sbin/nologin cadencewright
COPY --from=build /out/cadencewright /usr/local/bin/cadencewright
USER 10001
ENV CADENCEWRIGHT_ADDR=0.0.0.0:8080
EXPOSE 8080
HEALTHCHECK --interval=15s --timeout=3s --start-period=30s CMD ["/usr/local/bin/cadencewright", "health", "--addr", "127.0.0.1:8080"]
ENTRYPOINT ["/usr/local/bin/cadencewright"]
CMD ["serve"]
