FROM golang:1.26 AS build
WORKDIR /src
COPY go.mod go.sum ./
RUN go mod download
COPY api api
COPY calc calc
COPY service service
RUN CGO_ENABLED=0 go build -trimpath -buildvcs=false -ldflags="-s -w" -o /floatrail ./service

FROM scratch
COPY --from=build /floatrail /floatrail
USER 65532:65532
# The binary listens on loopback by default; a container's ports are reached
# from outside it.
ENV FLOATRAIL_HTTP_ADDR=:8080 \
    FLOATRAIL_GRPC_ADDR=:50051 \
    FLOATRAIL_OPS_ADDR=:9464
EXPOSE 8080 50051 9464
ENTRYPOINT ["/floatrail"]
