"""The reference values of folds_test.cpp: SplitMix64 and the shuffled folds, written a second time in plain Python.

    python3 tests/design/folds_reference.py
"""
MASK = (1 << 64) - 1


class SplitMix64:
    def __init__(self, seed):
        self.state = seed

    def next(self):
        self.state = (self.state + 0x9E3779B97F4A7C15) & MASK
        z = self.state
        z = ((z ^ (z >> 30)) * 0xBF58476D1CE4E5B9) & MASK
        z = ((z ^ (z >> 27)) * 0x94D049BB133111EB) & MASK
        return z ^ (z >> 31)

    def below(self, n):
        limit = (1 << 64) // n * n
        while True:
            drawn = self.next()
            if drawn < limit:
                return drawn % n


def shuffled(n, random):
    order = list(range(n))
    for i in range(n, 1, -1):
        j = random.below(i)
        order[i - 1], order[j] = order[j], order[i - 1]
    return order


def shuffled_folds(n_rows, n_folds, random):
    fold = [0] * n_rows
    for place, row in enumerate(shuffled(n_rows, random)):
        fold[row] = place % n_folds
    return fold


def stream(seed, repeat):
    if repeat == 0:
        return SplitMix64(seed)
    return SplitMix64(SplitMix64(seed ^ (repeat * 0xD1B54A32D192ED03 & MASK)).next())


random = SplitMix64(1234567)
print("SplitMix64(1234567):", [random.next() for _ in range(3)])
print("13 rows, 4 folds, seed 20261201:")
for repeat in range(2):
    print("  repeat", repeat, shuffled_folds(13, 4, stream(20261201, repeat)))
