"""An authority and certificates of the tests' own."""

import ssl
from datetime import UTC, datetime, timedelta
from pathlib import Path

from cryptography import x509
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.x509.oid import NameOID


def certificate_for(name: str, folder: Path) -> tuple[ssl.SSLContext, ssl.SSLContext]:
    """What a server called so serves with, and what a client that believes its authority connects with."""
    authority_key, server_key = ec.generate_private_key(ec.SECP256R1()), ec.generate_private_key(ec.SECP256R1())
    authority = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, "an authority of the tests")])
    start = datetime.now(UTC) - timedelta(hours=1)
    root = (
        x509.CertificateBuilder(authority, authority, authority_key.public_key(), 1, start, start + timedelta(days=1))
        .add_extension(x509.BasicConstraints(ca=True, path_length=0), critical=True)
        .sign(authority_key, hashes.SHA256())
    )
    subject = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, name)])
    leaf = (
        x509.CertificateBuilder(authority, subject, server_key.public_key(), 2, start, start + timedelta(days=1))
        .add_extension(x509.SubjectAlternativeName([x509.DNSName(name)]), critical=False)
        .sign(authority_key, hashes.SHA256())
    )
    (folder / "root.pem").write_bytes(root.public_bytes(serialization.Encoding.PEM))
    (folder / "leaf.pem").write_bytes(
        leaf.public_bytes(serialization.Encoding.PEM)
        + server_key.private_bytes(
            serialization.Encoding.PEM, serialization.PrivateFormat.PKCS8, serialization.NoEncryption()
        )
    )
    server = ssl.SSLContext(ssl.PROTOCOL_TLS_SERVER)
    server.load_cert_chain(folder / "leaf.pem")
    return server, ssl.create_default_context(cafile=folder / "root.pem")
