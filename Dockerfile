# The service in a container: built in one stage, run in another as a user without rights.
FROM debian:bookworm-slim AS build
WORKDIR /src
COPY deploy/packages deploy/install deploy/
RUN deploy/install build
COPY . .
RUN cmake -B /build -DCMAKE_BUILD_TYPE=Release -DCORESOAK_UNIT_TESTS=OFF \
  && cmake --build /build --target coresoak -j "$(nproc)" \
  && strip /build/coresoak

FROM debian:bookworm-slim
COPY deploy/packages deploy/install /usr/share/coresoak/
RUN /usr/share/coresoak/install run && rm -rf /var/lib/apt/lists/* /var/cache/apt/* /usr/share/doc /usr/share/man
COPY --from=build /build/coresoak /usr/local/bin/coresoak
COPY LICENSE /usr/share/coresoak/
# One thread of linear algebra for each worker; the workers are as many as the container may use.
ENV CORESOAK_LISTEN=0.0.0.0:8080 OPENBLAS_NUM_THREADS=1
USER 10001:10001
EXPOSE 8080
HEALTHCHECK --interval=10s --timeout=3s --start-period=5s \
  CMD ["bash", "-c", "exec 3<>/dev/tcp/127.0.0.1/${CORESOAK_LISTEN##*:} && printf 'GET /healthz HTTP/1.0\\r\\nHost: localhost\\r\\n\\r\\n' >&3 && head -n 1 <&3 | grep -q ' 200 '"]
ENTRYPOINT ["coresoak"]
CMD ["serve"]
