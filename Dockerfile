# The service as one static binary in an otherwise empty image. Build and run:
#
#   docker build -t leat .
#   docker run --rm --read-only -p 127.0.0.1:8080:8080 -e LEAT_ALLOW_OPEN=true leat
#
# The build fetches Go modules; the running container needs no network but its own port. What needs no container either:
# CGO_ENABLED=0 go build -trimpath -tags nomsgpack ./cmd/leat
#
# The same commit gives the same binary: .ci/long reproducible.

# Any image with this Go and a shell will do.
ARG GO_IMAGE=golang:1.26
FROM ${GO_IMAGE} AS build
WORKDIR /src
# Modules first, so that a change of ours does not fetch them again.
COPY go.mod go.sum ./
RUN go mod download && go mod verify
COPY . .
# What the binary is made of asks that its licences go along.
RUN mkdir /out && go run .ci/licences.go -texts > /out/licences.txt && cp LICENSE /out/licence.txt
# GOAMD64=v1 is part of what the service promises: the same request gives the same bytes on every replica. The folder for
# bulk answers that wait is made here since an empty image has nothing to make it with.
RUN CGO_ENABLED=0 GOAMD64=v1 go build -trimpath -tags nomsgpack -ldflags '-s -w' -o /out/leat ./cmd/leat && mkdir -m 0700 /out/spool

FROM scratch
# Of authorities that sign the certificates of databases; the service itself calls nobody.
COPY --from=build /etc/ssl/certs/ca-certificates.crt /etc/ssl/certs/ca-certificates.crt
COPY --from=build /out/licences.txt /out/licence.txt /
COPY --from=build /out/leat /leat
COPY --from=build --chown=65532:65532 /out/spool /spool
# By number: an orchestrator can then see that it is not root.
USER 65532:65532
VOLUME ["/spool"]
# Listening on every address needs keys (LEAT_KEYS_FILE), TLS (LEAT_TLS_CERTIFICATE, LEAT_TLS_KEY), or LEAT_ALLOW_OPEN=true where the network in front
# keeps strangers out; the image does not decide that.
ENV LEAT_LISTEN=:8080 LEAT_SPOOL_DIR=/spool
EXPOSE 8080
HEALTHCHECK --interval=10s --timeout=3s CMD ["/leat", "health"]
ENTRYPOINT ["/leat"]
CMD ["serve"]
