"""The science of corymb: plain data in, plain data out; no screen, no server, no database."""
