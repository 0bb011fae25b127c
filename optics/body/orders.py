"""Orders in which circles are placed: few of them, chosen once, that build nearly the tightest layouts.

For each number of circles the list was picked from all orders (up to 7) or several hundred, so
that on random part lists the best of the listed ones comes closest to the best of all. An order
names the circles from the largest, 0; + sends ties toward the first circle, - away from it.
"""

from functools import lru_cache

import numpy as np

_LISTED = {
    4: "0213- 1230+",
    5: "12304+ 03214- 02134-",
    6: "130425- 012435+ 045231+ 041325- 041235- 042315- 032514-",
    7: ("0452136+ 6204135+ 6204135- 1253046+ 4201356- 4015263+ 3125046- 3241056+ 3015624+ 6241350- 6103245+"),
    8: (
        "40135276+ 43217056+ 04251637- 02147356+ 40632715- 74150362- 52017346- 03721456+ 05312467- 25401673+ "
        "17052346- 02147356-"
    ),
    9: (
        "084216375+ 142503687- 280713564- 201345678- 302145678+ 526480173+ 601428375+ 350642178- 041352786- "
        "462715380+ 431705286+ 704326185- 237140685- 415072683-"
    ),
    10: (
        "1370489265+ 0314256789- 1362904758- 1709356284- 3841279065+ 0214356789+ 3214605798+ 0412536879- "
        "2956410738- 0421536789+ 8019467532- 2380946175+ 3268751049+ 0231546897- 8401753629+ 1024357689+"
    ),
}
_DRAWN = 32  # orders beyond 10 circles: descending size, shaken a little or wholly


@lru_cache(maxsize=64)
def orders(count: int) -> tuple[np.ndarray, np.ndarray]:
    """Orders to try for so many circles, and where ties go: [order, circle] and [order].

    The first two are by descending size: they find room for small circles beside the two widest.

    >>> order, tie = orders(4)
    >>> order[0].tolist(), float(tie[0])
    ([0, 1, 2, 3], -1.0)
    """
    if count in _LISTED:
        words = _LISTED[count].split()
        order = np.array([[int(circle) for circle in word[:-1]] for word in words])
        tie = np.array([1.0 if word[-1] == "+" else -1.0 for word in words])
        order, tie = np.concatenate([[range(count)] * 2, order]), np.concatenate([[-1.0, 1.0], tie])
    else:
        draw, descending = np.random.default_rng(count), np.arange(count)
        shaken = [np.argsort(descending + draw.normal(0.0, 1.5, count)) for _ in range(_DRAWN // 2)]
        order = np.array(
            [descending, descending, *shaken, *(draw.permutation(count) for _ in range(_DRAWN - 2 - len(shaken)))]
        )
        tie = np.where(np.arange(_DRAWN) % 2, 1.0, -1.0)  # the descending one both ways
    order.setflags(write=False)
    tie.setflags(write=False)
    return order, tie
