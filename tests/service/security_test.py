"""Who may ask, from where, and what is refused before it can do harm."""

import os
import re
import socket
import ssl
import subprocess
import threading
import time
import unittest
import warnings

from client import PROGRAM, Service, ServiceTest, chain_text

READ, SUBMIT, ADMIN = "r" * 32, "s" * 32, "a" * 32


class TokenTest(ServiceTest):
    def token_file(self, text=f"# who may ask\nread {READ}\nsubmit {SUBMIT}\nadmin {ADMIN}  # all\n", mode=0o600):
        path = self.folder / "tokens"
        path.write_text(text)
        path.chmod(mode)
        return path

    def refused_start(self, *options):
        run = subprocess.run([PROGRAM, "serve", "--store", self.store, "--port", "0", *map(str, options)],
                             capture_output=True, text=True, timeout=60, check=False)
        self.assertEqual((run.returncode, run.stdout), (2, ""), run.stderr)
        return re.search(r"\[([a-z-]+)\]", run.stderr)[1]

    def test_exposure_needs_tokens_and_encryption(self):
        tokens = self.token_file()
        self.assertEqual(self.refused_start("--host", "0.0.0.0"), "no-tokens")
        self.assertEqual(self.refused_start("--host", "0.0.0.0", "--behind-proxy"), "no-tokens")
        self.assertEqual(self.refused_start("--host", "0.0.0.0", "--token-file", tokens), "not-encrypted")
        self.assertEqual(self.refused_start("--host", "::", "--token-file", tokens), "not-encrypted")
        self.assertEqual(self.refused_start("--tls-cert", tokens), "contradiction")
        self.assertEqual(self.refused_start("--tls-cert", tokens, "--tls-key", tokens), "bad-certificate")
        service = self.serve("--host", "0.0.0.0", "--token-file", tokens, "--behind-proxy")
        self.assertEqual(service.ask("GET", "/v1/jobs").status, 401)

    def test_token_files_that_are_refused(self):
        for text, mode, code in [(f"read {READ}\n", 0o640, "open-token-file"), (f"read {READ}\n", 0o604, "open-token-file"),
                                 ("read short\n", 0o600, "bad-token-file"), (f"all {READ}\n", 0o600, "bad-token-file"),
                                 ("# nothing\n", 0o600, "bad-token-file"), (f"read {READ} x\n", 0o600, "bad-token-file")]:
            self.assertEqual(self.refused_start("--token-file", self.token_file(text, mode)), code)
        self.assertEqual(self.refused_start("--token-file", self.folder / "none"), "bad-token-file")

    def test_scopes_and_that_no_secret_is_logged(self):
        (self.models / "K.mtx").write_text(chain_text(4))
        service = self.serve("--token-file", self.token_file())
        check = {"command": "check", "inputs": {"stiffness": "models/K.mtx"}}

        def ask(token, method, path, body=None):
            return service.ask(method, path, body, {"Authorization": "Bearer " + token} if token else {}).status

        rights = [("GET", "/v1/jobs", None, (401, 200, 200, 200)), ("GET", "/metrics", None, (401, 200, 200, 200)),
                  ("GET", "/v1/files", None, (401, 200, 200, 200)), ("POST", "/v1/jobs", check, (401, 403, 202, 202)),
                  ("POST", "/v1/inputs", b"x", (401, 403, 201, 200)),
                  ("DELETE", "/v1/jobs/none", None, (401, 403, 403, 404)), ("GET", "/live", None, (200, 200, 200, 200)),
                  ("GET", "/ready", None, (200, 200, 200, 200)), ("GET", "/v1/openapi.json", None, (200, 200, 200, 200))]
        for method, path, body, expected in rights:
            self.assertEqual(tuple(ask(token, method, path, body) for token in ("", READ, SUBMIT, ADMIN)), expected,
                             (method, path))
        for wrong in (READ[:-1], READ + "r", READ.upper(), "x" * 32, " " + READ, ""):
            self.assertEqual(service.ask("GET", "/v1/jobs", headers={"Authorization": "Bearer " + wrong}).status, 401)
        for scheme in ("Basic " + READ, READ, "Bearer", "Bearer " + READ + ", Bearer " + ADMIN):
            self.assertEqual(service.ask("GET", "/v1/jobs", headers={"Authorization": scheme}).status, 401)
        scopes = service.ask("GET", "/v1/service", headers={"Authorization": "Bearer " + SUBMIT}).json()["scopes"]
        self.assertEqual(scopes, ["read", "submit"])
        nobody = service.ask("GET", "/v1/service").json()
        self.assertEqual((nobody["scopes"], nobody["roots"], set(nobody["limits"].values())), ([], [], {0}))
        self.assertEqual(service.stop(), 0)
        left = service.log.read_bytes() + (self.folder / "service.err").read_bytes()
        for path in self.store.rglob("*"):
            left += path.read_bytes() if path.is_file() else b""
        for token in (READ, SUBMIT, ADMIN):
            self.assertNotIn(token.encode(), left)

    def test_encrypted(self):
        certificate, key = self.folder / "cert.pem", self.folder / "key.pem"
        subprocess.run(["openssl", "req", "-x509", "-newkey", "ec", "-pkeyopt", "ec_paramgen_curve:P-256", "-nodes",
                        "-days", "2", "-subj", "/CN=localhost", "-addext", "subjectAltName=IP:127.0.0.1",
                        "-keyout", key, "-out", certificate], check=True, capture_output=True)
        service = self.serve("--host", "0.0.0.0", "--tls-cert", certificate, "--tls-key", key, "--token-file",
                             self.token_file(), scheme="https")
        context = ssl.create_default_context(cafile=certificate)
        import http.client
        connection = http.client.HTTPSConnection("127.0.0.1", service.port, context=context, timeout=20)
        for _ in range(3):
            answer = service.ask("GET", "/v1/jobs", headers={"Authorization": "Bearer " + READ}, connection=connection)
            self.assertEqual(answer.status, 200)
        upload = service.ask("POST", "/v1/inputs", os.urandom(3_000_000), {"Authorization": "Bearer " + ADMIN},
                             connection=connection)
        self.assertEqual((upload.status, upload.json()["bytes"]), (201, 3_000_000))
        connection.close()
        old = ssl.SSLContext(ssl.PROTOCOL_TLS_CLIENT)
        old.check_hostname, old.verify_mode = False, ssl.CERT_NONE
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            old.maximum_version = ssl.TLSVersion.TLSv1_1
        with socket.create_connection(("127.0.0.1", service.port)) as plain, self.assertRaises((ssl.SSLError, OSError)):
            old.wrap_socket(plain)
        with socket.create_connection(("127.0.0.1", service.port)) as plain:
            plain.sendall(b"GET /live HTTP/1.1\r\nHost: localhost\r\n\r\n")
            plain.settimeout(20)
            try:
                self.assertNotIn(b"200", plain.recv(100))
            except ConnectionResetError:
                pass
        self.assertEqual(service.stop(), 0)


class OriginTest(ServiceTest):
    def test_other_sites_and_other_names(self):
        service = self.serve()
        here = f"127.0.0.1:{service.port}"
        self.problem(service.ask("GET", "/v1/jobs", headers={"Host": "evil.example"}), 421, "wrong-host")
        self.problem(service.ask("GET", "/v1/jobs", headers={"Host": "127.0.0.1.evil.example"}), 421, "wrong-host")
        self.problem(service.ask("GET", "/", headers={"Host": "evil.example:80"}), 421, "wrong-host")
        for host in (here, f"localhost:{service.port}", "[::1]:1", "LOCALHOST"):
            self.assertEqual(service.ask("GET", "/v1/jobs", headers={"Host": host}).status, 200)
        for fields in ({"Origin": "https://evil.example"}, {"Origin": "null"}, {"Origin": "http://localhost:1"},
                       {"Sec-Fetch-Site": "cross-site"}, {"Sec-Fetch-Site": "same-site"}, {"Origin": ""}):
            self.problem(service.ask("POST", "/v1/jobs", {}, fields), 403, "other-site")
            self.problem(service.ask("GET", "/v1/jobs", headers=fields), 403, "other-site")
            self.problem(service.ask("POST", "/v1/jobs/x/cancel", b"", {**fields, "Content-Type": ""}), 403, "other-site")
        same = {"Origin": "http://" + here, "Sec-Fetch-Site": "same-origin"}
        self.problem(service.ask("POST", "/v1/jobs", {}, same), 400, "bad-request")
        named = Service(self.folder / "other", "--public-name", "jobs.example")
        self.assertEqual(named.ask("GET", "/live", headers={"Host": "jobs.example"}).status, 200)
        self.assertEqual(named.ask("GET", "/live", headers={"Host": "other.example"}).status, 421)
        self.assertEqual(named.stop(), 0)

    def test_security_fields_are_everywhere(self):
        service = self.serve()
        for path in ("/live", "/v1/jobs", "/v1/nothing", "/nothing"):
            fields = service.ask("GET", path).headers
            self.assertEqual(fields["X-Content-Type-Options"], "nosniff")
            self.assertIn("default-src 'none'", fields["Content-Security-Policy"])
            self.assertIn("frame-ancestors 'none'", fields["Content-Security-Policy"])
            self.assertEqual(fields["Referrer-Policy"], "no-referrer")
            self.assertIsNone(fields["Access-Control-Allow-Origin"])
            self.assertEqual(fields["Cross-Origin-Resource-Policy"], "same-origin")


class LimitTest(ServiceTest):
    def raw(self, service, data, wait=20):
        with socket.create_connection(("127.0.0.1", service.port), timeout=wait) as connection:
            connection.sendall(data)
            answer = b""
            try:
                while piece := connection.recv(65536):
                    answer += piece
            except TimeoutError:
                pass
            return answer

    def test_heads_that_are_refused(self):
        service = self.serve()
        end = b"\r\nHost: localhost\r\n\r\n"
        cases = [
            (b"GET /live HTTP/1.1\r\n\r\n", 400), (b"GET /live HTTP/1.1\r\nHost: a\r\nHost: b\r\n\r\n", 400),
            (b"GET  /live HTTP/1.1" + end, 400), (b"get /live HTTP/1.1" + end, 501), (b"GET /live HTTP/2.0" + end, 505),
            (b"GET live HTTP/1.1" + end, 400), (b"GET http://x/ HTTP/1.1" + end, 400), (b"PATCH / HTTP/1.1" + end, 405),
            (b"OPTIONS * HTTP/1.1" + end, 405), (b"GET /%00 HTTP/1.1" + end, 400), (b"GET /%zz HTTP/1.1" + end, 400),
            (b"GET /live HTTP/1.1\r\nA b: c" + end, 400), (b"GET /live HTTP/1.1\r\n folded: x" + end, 400),
            (b"GET /live HTTP/1.1\nHost: localhost\r\n\r\n", 400), (b"GET /live HTTP/1.1\r\nX: \x01" + end, 400),
            (b"GET /" + b"x" * 3000 + b" HTTP/1.1" + end, 414),
            (b"GET /live HTTP/1.1\r\nX: " + b"x" * 20000 + end, 431),
            (b"GET /live HTTP/1.1\r\n" + b"X: y\r\n" * 70 + b"Host: localhost\r\n\r\n", 431),
            (b"GET /live HTTP/1.1\r\nContent-Length: 5" + end + b"12345", 400),
            (b"POST /v1/jobs HTTP/1.1" + end, 411), (b"POST /v1/jobs HTTP/1.1\r\nContent-Length: -1" + end, 400),
            (b"POST /v1/jobs HTTP/1.1\r\nContent-Length: 1, 1" + end, 400),
            (b"POST /v1/jobs HTTP/1.1\r\nContent-Length: 1\r\nContent-Length: 1" + end, 400),
            (b"POST /v1/jobs HTTP/1.1\r\nContent-Length: 1\r\nTransfer-Encoding: chunked" + end, 400),
            (b"POST /v1/jobs HTTP/1.1\r\nTransfer-Encoding: gzip, chunked" + end, 501),
            (b"POST /v1/jobs HTTP/1.1\r\nContent-Length: 99999999999999999999" + end, 400),
            (b"POST /v1/jobs HTTP/1.1\r\nContent-Length: 9\r\nExpect: magic" + end, 417),
        ]
        for data, status in cases:
            with self.subTest(data[:60]):
                answer = self.raw(service, data)
                self.assertTrue(answer.startswith(b"HTTP/1.1 %d " % status), answer[:200])
                self.assertIn(b"application/problem+json", answer)
                self.assertIn(b"Connection: close", answer)
        self.assertEqual(service.ask("GET", "/live").status, 200)

    def test_no_second_request_hides_in_a_refused_body(self):
        service = self.serve()
        hidden = b"GET /v1/commands HTTP/1.1\r\nHost: localhost\r\n\r\n"
        first = b"POST /v1/jobs HTTP/1.1\r\nHost: localhost\r\nContent-Type: text/plain\r\nContent-Length: %d\r\n\r\n"
        answer = self.raw(service, first % len(hidden) + hidden)
        self.assertEqual(answer.count(b"HTTP/1.1 "), 1, answer)
        self.assertTrue(answer.startswith(b"HTTP/1.1 415 "), answer)

    def test_connections_and_rate(self):
        service = self.serve("--connections", "3")
        idle = [socket.create_connection(("127.0.0.1", service.port)) for _ in range(3)]
        for connection in idle:
            connection.sendall(b"GET /live HTTP/1.1\r\nHost: localhost\r\n\r\n")
            self.assertTrue(connection.recv(100).startswith(b"HTTP/1.1 200"))
        self.assertTrue(self.raw(service, b"").startswith(b"HTTP/1.1 503 "))
        for connection in idle:
            connection.close()
        # Each of these asks on a connection of its own, which counts until the service has seen it closed.
        answered, until = None, time.monotonic() + 20
        while answered != 200 and time.monotonic() < until:
            time.sleep(0.05)
            try:
                answered = service.ask("GET", "/live").status
            except OSError:
                pass
        self.assertEqual(answered, 200)
        slow = Service(self.folder / "slow", "--rate", "1")
        statuses = [slow.ask("GET", "/live").status for _ in range(30)]
        self.assertEqual(statuses[:2], [200, 200])
        self.assertIn(429, statuses)
        self.assertEqual(slow.stop(), 0)

    def test_bombs_end_their_job_only(self):
        import gzip
        import io
        import zipfile
        service = self.serve("--memory-cap", "300M")
        head = b"%%MatrixMarket matrix coordinate real symmetric\n100000000 100000000 100000000\n"
        packed = gzip.compress(head + b"1 1 1.0\n" * 25_000_000, 1)
        (self.models / "bomb.mtx.gz").write_bytes(packed)
        archive = io.BytesIO()
        with zipfile.ZipFile(archive, "w", zipfile.ZIP_DEFLATED, compresslevel=1) as bomb:
            head = b"\x93NUMPY\x01\x00v\x00{'descr': '%s', 'fortran_order': False, 'shape': (%s), }"
            for name, kind, shape, data in [("format", b"|S3", b"", b"csr"), ("shape", b"<i8", b"2,", bytes([0, 1] + [0] * 14)),
                                            ("indptr", b"<i4", b"2,", bytes(8)), ("indices", b"<i4", b"50000000,", None),
                                            ("data", b"<f8", b"50000000,", None)]:
                with bomb.open(name + ".npy", "w") as entry:
                    entry.write((head % (kind, shape)).ljust(127) + b"\n")
                    for _ in range(1 if data else 20 if name == "indices" else 40):
                        entry.write(data or bytes(10_000_000))
        (self.models / "bomb.npz").write_bytes(archive.getvalue())
        for name in ("bomb.mtx.gz", "bomb.npz"):
            job = service.submit({"command": "check", "inputs": {"stiffness": "models/" + name}})["id"]
            job = service.wait(job, seconds=400)  # 450 MB to unpack, slow under a sanitizer
            self.assertEqual(job["state"], "failed", job)
            self.assertIn(job["exit_code"], (2, 4))
            self.assertTrue(job["problem"]["detail"])
        self.assertEqual(service.ask("GET", "/ready").status, 200)


if __name__ == "__main__":
    unittest.main()
