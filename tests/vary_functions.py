"""Functions that stand in for a pour: what they give is known exactly, and workers can import them."""

import math
import os
import time


def ishigami(values):
    """Ishigami and Homma, Proc. ISUMA'90 (1990) 398: a = 7, b = 0.1, three inputs on -pi to pi."""
    x1, x2, x3 = values["x1"], values["x2"], values["x3"]
    return {"y": math.sin(x1) + 7.0 * math.sin(x2) ** 2 + 0.1 * x3**4 * math.sin(x1)}


def linear(values):
    """A sum, so that normal inputs give a normal figure."""
    return {"y": values["x1"] + 2.0 * values["x2"]}


def logged(values):
    """Leave a line for each call in the file that the environment names, then take a while."""
    handle = os.open(os.environ["VARY_LOG"], os.O_WRONLY | os.O_APPEND | os.O_CREAT)
    os.write(handle, f"{values['x']}\n".encode())
    os.close(handle)
    time.sleep(float(os.environ.get("VARY_SECONDS", "0.01")))
    return {"square": values["x"] ** 2}


def noted(values):
    """Leave a line for each call in the file that the inputs name."""
    with open(values["log"], "a", encoding="utf-8") as file:
        file.write(f"{values['x']}\n")
    return {"square": values["x"] ** 2}


def picky(values):
    """Refuse large values, divide by zero at zero, and kill the process at minus one."""
    if values["x"] == -1.0:
        os._exit(9)
    if values["x"] > 3.0:
        raise ValueError("too large")
    return {"inverse": 1.0 / values["x"]}


def clock(values):
    """A time that is not always reached within 60 s."""
    time = values["x"]
    return {"hold_time_s": time} if time <= 60.0 else {"hold_time_s": None, "hold_time_at_least_s": 60.0}


def hock_schittkowski_24(values):
    """W. Hock, K. Schittkowski, Test Examples for Nonlinear Programming Codes (1981), problem 24."""
    x1, x2, root = values["x1"], values["x2"], math.sqrt(3.0)
    return {
        "f": ((x1 - 3.0) ** 2 - 9.0) * x2**3 / (27.0 * root),
        "g1": x1 / root - x2,
        "g2": x1 + root * x2,
        "g3": 6.0 - x1 - root * x2,
    }


def hock_schittkowski_21(values):
    """W. Hock, K. Schittkowski, Test Examples for Nonlinear Programming Codes (1981), problem 21."""
    x1, x2 = values["x1"], values["x2"]
    return {"f": 0.01 * x1**2 + x2**2 - 100.0, "g": 10.0 * x1 - x2 - 10.0}


def threads(values):
    """What the environment tells linear-algebra libraries in this process."""
    return {"threads": float(os.environ["OPENBLAS_NUM_THREADS"])}


def squared(values):
    """What `logged` gives, at once."""
    return {"square": values["x"] ** 2}
