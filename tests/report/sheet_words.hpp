// As much of a spreadsheet as the formulas need, for python3 to evaluate them.
#pragma once

namespace formsieve::report::test {

/// The words of a spreadsheet in Python: a failed operation is a value that every later one passes on.
inline constexpr const char* kSheetWords = R"(
import math, re
class Fail:
    pass
FAIL = Fail()
def value(x):
    if isinstance(x, Value): return x.held
    return 0.0 if x is None else x
def worked(f, *parts):
    held = [value(p) for p in parts]
    if any(not isinstance(h, (int, float)) for h in held): return Value(FAIL)
    try:
        result = f(*[float(h) for h in held])
    except (ValueError, OverflowError, ZeroDivisionError):
        return Value(FAIL)
    return Value(result if not isinstance(result, complex) and math.isfinite(result) else FAIL)
def compared(f, a, b):
    a, b = value(a), value(b)
    if a is FAIL or b is FAIL: return Value(FAIL)
    if isinstance(a, str) != isinstance(b, str): a, b = isinstance(a, str), isinstance(b, str)  # text sorts last
    return f(a, b)
class Value:
    def __init__(self, held): self.held = held
    def __add__(self, o): return worked(lambda a, b: a + b, self.cell(), o)
    def __radd__(self, o): return worked(lambda a, b: b + a, self.cell(), o)
    def __sub__(self, o): return worked(lambda a, b: a - b, self.cell(), o)
    def __rsub__(self, o): return worked(lambda a, b: b - a, self.cell(), o)
    def __mul__(self, o): return worked(lambda a, b: a * b, self.cell(), o)
    def __rmul__(self, o): return worked(lambda a, b: b * a, self.cell(), o)
    def __truediv__(self, o): return worked(lambda a, b: a / b, self.cell(), o)
    def __rtruediv__(self, o): return worked(lambda a, b: b / a, self.cell(), o)
    def cell(self): return 0.0 if self.held is None else self.held
    def __lt__(self, o): return compared(lambda a, b: a < b, self.cell(), o)
    def __le__(self, o): return compared(lambda a, b: a <= b, self.cell(), o)
    def __gt__(self, o): return compared(lambda a, b: a > b, self.cell(), o)
    def __ge__(self, o): return compared(lambda a, b: a >= b, self.cell(), o)
def truth(c):
    return c if isinstance(c, bool) else FAIL
def IF(c, a, b):
    return Value(FAIL) if truth(c) is FAIL else (a if c else b)
def AND(*cs):
    return Value(FAIL) if any(truth(c) is FAIL for c in cs) else all(cs)
def OR(*cs):
    return Value(FAIL) if any(truth(c) is FAIL for c in cs) else any(cs)
def IFERROR(a, b): return b if isinstance(a, Value) and a.held is FAIL else a
def NA(): return Value(FAIL)
def ISNUMBER(a): return isinstance(a, Value) and isinstance(a.held, float)
def EXACT(a, b): return ("" if a.held is None else a.held) == b
def of(f): return lambda *parts: worked(f, *parts)
LN, LOG10, EXP, POWER, SQRT = of(math.log), of(math.log10), of(math.exp), of(math.pow), of(math.sqrt)
SINH, COSH, ASINH, ATAN, SIN = of(math.sinh), of(math.cosh), of(math.asinh), of(math.atan), of(math.sin)
ABS, ATANH, SIGN = of(abs), of(math.atanh), of(lambda a: float((a > 0) - (a < 0)))
def python(formula):
    assert formula.startswith("=")
    return compile(re.sub(r'"(?:[^"]|"")*"', lambda m: repr(m.group()[1:-1].replace('""', '"')), formula[1:]), "f", "eval")
def row_value(eta, mean, n, cells):
    def letters(i): return chr(65 + i) if i < 26 else letters(i // 26 - 1) + letters(i % 26)
    names = {letters(i) + "2": Value(float(c) if isinstance(c, (int, float)) else c) for i, c in enumerate(cells)}
    result = eval(eta, globals(), names)
    names[letters(n) + "2"] = result if isinstance(result, Value) else Value(result)
    result = eval(mean, globals(), names)
    return float("nan") if result == "" else (result.held if isinstance(result, Value) else result)
)";

}  // namespace formsieve::report::test
