"""Event texts, chains and proofs in every runtime: what is read, written, refused, and asked to be hashed."""

from fieldcheck.engine import chain, texts


def run(case):
    op, args = case
    if op == "write":
        return texts.write(args[0])
    if op == "reread":
        text = texts.write(args[0])
        back = texts.read(text)
        return str(back == args[0]) + str(texts.size(text)) + texts.write(back)
    if op == "read":
        return texts.write(texts.read(args[0]))
    if op == "read file":
        return texts.write(texts.read(args[0], None))
    if op == "length":
        return str(len(texts.read(texts.write(args))[0]))
    if op == "event":
        return texts.write(chain.read_event(args[0]))
    if op == "requests":
        return requests(chain.root(args))
    if op == "chain":
        return requests(chain.check_device_chain(args))
    if op == "inclusion":
        return requests(chain.check_inclusion(args[0], args[1], args[2], args[3], "a" * 64))
    if op == "consistency":
        return requests(chain.check_consistency(args[0], "a" * 64, args[1], "b" * 64, args[2]))
    raise ValueError(op)


def requests(steps):
    """Every request of a generator, each answered by a made-up digest of its number."""
    asked = []
    try:
        request = next(steps)
        while True:
            asked.append(request[0] + ":" + request[1])
            digits = str(len(asked))
            request = steps.send("0" * (64 - len(digits)) + digits)
    except StopIteration:
        pass
    return "|".join(asked)
