"""Electronic signatures: identities, signing into the PDF, sign-off records, and what a check of them finds.

Bytes in, bytes out; the clock comes in as a value. The parts that touch the world say so: `stamping` asks a
time-stamp authority over the network, `token` talks to a PKCS#11 module.
"""
