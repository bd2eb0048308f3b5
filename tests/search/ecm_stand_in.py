"""Stands in for the program ecm: reads the same input, prints in the same form, does as it is told.

ecm_stand_in.py BEHAVIOUR [options of ecm]

Told nothing it finds nothing; told the numbers (hexadecimal) for which it ``works`` it runs the
curves drawn for them, by our own code.
"""

import json
import os
import re
import signal
import sys
import time

from gmpy2 import mpz

from auditor.search.ecm import parameter, run_curve, suyama


def drawn(numbers: list[int], n: int, sigma: int, b1: int) -> int:
    """The parameter of the curve for one of the numbers that has this sigma modulo ``n``."""
    multiples = (number for number in numbers if number % n == 0)
    candidates = (parameter(number, b1, index) for number in multiples for index in range(300))
    return next(k for k in candidates if suyama(mpz(n), k)[0] == sigma)


def main() -> int:
    sys.set_int_max_str_digits(20_000)
    behaviour = json.loads(sys.argv[1])
    print(behaviour.get("greeting", "GMP-ECM 9.9 [stands in] [ECM]"))
    if sys.argv[2:] == ["2"]:
        return 0
    assert sys.argv[2:5] == ["-one", "-resume", "-"], sys.argv
    if sys.argv[5] == behaviour.get("fails_with"):
        return 1
    if "dies_until" in behaviour:
        with open(behaviour["log"], "a+") as file:
            file.write("x")
            if file.tell() < behaviour["dies_until"]:
                os.kill(os.getpid(), signal.SIGKILL)
    curves = [dict(re.findall(r"(\w+)=(\w+)", line)) for line in sys.stdin]
    for index, curve in enumerate(curves):
        if index == behaviour.get("stop_at"):
            break
        if index == behaviour.get("die_at"):
            os.kill(os.getpid(), behaviour.get("by", signal.SIGKILL))
        if index == behaviour.get("sleep_at"):
            with open(behaviour["pid_file"], "w") as file:
                file.write(str(os.getpid()))
            time.sleep(600)
        sigma = behaviour.get("sigma", curve["SIGMA"])
        print(f"Using B1={sys.argv[5]}, B2={sys.argv[6]}, polynomial x^1, sigma=0:{sigma}")
        if index == behaviour.get("find_at"):
            print(f"********** Factor found in step 2: {behaviour['factor']}")
            return 6
        if "works" in behaviour:
            n, sigma, b1, b2 = map(int, (curve["N"], curve["SIGMA"], sys.argv[5], sys.argv[6]))
            numbers = [int(number, 16) for number in behaviour["works"]]
            divisor = run_curve(n, b1, b2, drawn(numbers, n, sigma, b1))
            if divisor > 1:
                print(f"********** Factor found in step 2: {divisor}")
                return 6
    return int(behaviour.get("status", 0))


if __name__ == "__main__":
    sys.exit(main())
