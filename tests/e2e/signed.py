"""A receiver's side of Standard Webhooks 1.0.0, written from the published rule and from nothing of the service."""
import base64
import hashlib
import hmac


def key_of(secret):
    """The bytes a secret stands for: base64 after `whsec_`, else its own bytes."""
    return base64.b64decode(secret[6:], validate=True) if secret.startswith("whsec_") else secret.encode()


def signature(key, webhook_id, timestamp, body):
    signed = f"{webhook_id}.{timestamp}.".encode() + body
    return "v1," + base64.b64encode(hmac.new(key, signed, hashlib.sha256).digest()).decode()


def verifies(secret, headers, body, now=None, tolerance=300):
    """Whether one of the signatures is this secret's, over exactly these bytes, and the time is near `now` (Unix seconds)."""
    timestamp = headers["webhook-timestamp"]
    if not timestamp.isdecimal() or (now is not None and abs(int(timestamp) - now) > tolerance):
        return False
    expected = signature(key_of(secret), headers["webhook-id"], timestamp, body)
    return any(hmac.compare_digest(expected, given) for given in headers["webhook-signature"].split(" "))
