"""Stands in for the program ecm: reads the same input, prints in the same form, does as it is told.

ecm_stand_in.py BEHAVIOUR [options of ecm]
"""

import json
import os
import re
import signal
import sys
import time


def main() -> int:
    behaviour = json.loads(sys.argv[1])
    print("GMP-ECM 9.9 [stands in] [ECM]")
    if sys.argv[2:] == ["2"]:
        return 0
    assert sys.argv[2:5] == ["-one", "-resume", "-"], sys.argv
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
    return int(behaviour.get("status", 0))


if __name__ == "__main__":
    sys.exit(main())
