"""Well-known methods whose steps depend on the data, for the table of forecasts.

Written from the methods' usual descriptions (Knuth, The Art of Computer Programming, vol. 3;
Cormen, Leiserson, Rivest and Stein, Introduction to Algorithms), in plain Python.
"""

from __future__ import annotations

import heapq


def bubble_until_quiet(keys: list[int]) -> list[int]:
    end, moved = len(keys), True
    while moved:
        moved = False
        for i in range(1, end):
            if keys[i - 1] > keys[i]:
                keys[i - 1], keys[i] = keys[i], keys[i - 1]
                moved = True
        end -= 1
    return keys


def comb_sort(keys: list[int]) -> list[int]:
    gap, moved = len(keys), True
    while gap > 1 or moved:
        gap, moved = max(1, gap * 10 // 13), False
        for i in range(len(keys) - gap):
            if keys[i] > keys[i + gap]:
                keys[i], keys[i + gap] = keys[i + gap], keys[i]
                moved = True
    return keys


def gnome_sort(keys: list[int]) -> list[int]:
    i = 0
    while i < len(keys):
        if i == 0 or keys[i - 1] <= keys[i]:
            i += 1
        else:
            keys[i - 1], keys[i] = keys[i], keys[i - 1]
            i -= 1
    return keys


def heap_sort(keys: list[int]) -> list[int]:
    def sift(top: int, end: int) -> None:
        while 2 * top + 1 < end:
            child = 2 * top + 1
            if child + 1 < end and keys[child] < keys[child + 1]:
                child += 1
            if keys[top] >= keys[child]:
                return
            keys[top], keys[child] = keys[child], keys[top]
            top = child

    for top in range(len(keys) // 2 - 1, -1, -1):
        sift(top, len(keys))
    for end in range(len(keys) - 1, 0, -1):
        keys[0], keys[end] = keys[end], keys[0]
        sift(0, end)
    return keys


def binary_insertion(keys: list[int]) -> list[int]:
    out: list[int] = []
    for key in keys:
        low, high = 0, len(out)
        while low < high:
            middle = (low + high) // 2
            if key < out[middle]:
                high = middle
            else:
                low = middle + 1
        out.insert(low, key)
    return out


def shell_sort(keys: list[int]) -> list[int]:
    gap = len(keys) // 2
    while gap:
        for i in range(gap, len(keys)):
            key, j = keys[i], i
            while j >= gap and keys[j - gap] > key:
                keys[j] = keys[j - gap]
                j -= gap
            keys[j] = key
        gap //= 2
    return keys


def quickselect(keys: list[int]) -> int:
    wanted = len(keys) // 2
    while len(keys) > 1:
        pivot = keys[0]
        less = [k for k in keys if k < pivot]
        same = [k for k in keys if k == pivot]
        if wanted < len(less):
            keys = less
        elif wanted < len(less) + len(same):
            return pivot
        else:
            wanted -= len(less) + len(same)
            keys = [k for k in keys if k > pivot]
    return keys[0] if keys else 0


def inversions(keys: list[int]) -> int:
    found = 0
    for i in range(len(keys)):
        for j in range(i):
            if keys[j] > keys[i]:
                found += 1
    return found


def rising_run(keys: list[int]) -> int:
    ends: list[int] = []
    for key in keys:
        low, high = 0, len(ends)
        while low < high:
            middle = (low + high) // 2
            if ends[middle] < key:
                low = middle + 1
            else:
                high = middle
        if low == len(ends):
            ends.append(key)
        else:
            ends[low] = key
    return len(ends)


def next_greater(keys: list[int]) -> list[int]:
    out, waiting = [-1] * len(keys), []
    for i, key in enumerate(keys):
        while waiting and keys[waiting[-1]] < key:
            out[waiting.pop()] = key
        waiting.append(i)
    return out


def treap_depths(keys: list[int]) -> int:
    root: list = []
    total = 0
    for key in keys:
        node = root
        while node:
            total += 1
            node = node[1] if key < node[0] else node[2]
        node += [key, [], []]
    return total


def probing(keys: list[int]) -> int:
    room = 2 * len(keys) + 1
    table: list[int | None] = [None] * room
    probes = 0
    for key in keys:
        slot = key * 40503 % room
        while table[slot] is not None and table[slot] != key:
            slot = (slot + 1) % room
            probes += 1
        table[slot] = key
    return probes


def chaining(keys: list[int]) -> int:
    chains: list[list[int]] = [[] for _ in range(max(1, len(keys) // 2))]
    compared = 0
    for key in keys:
        chain = chains[key * 40503 % len(chains)]
        for other in chain:
            compared += 1
            if other == key:
                break
        else:
            chain.append(key)
    return compared


def distinct_pairs(keys: list[int], total: int) -> int:
    seen: set[int] = set()
    found = 0
    for key in keys:
        if total - key in seen:
            found += 1
        seen.add(key)
    return found


def dijkstra(links: list[list[tuple[int, int]]]) -> int:
    far = {0: 0}
    queue = [(0, 0)]
    pushed = 0
    while queue:
        length, port = heapq.heappop(queue)
        if length > far[port]:
            continue
        for other, step in links[port]:
            if length + step < far.get(other, 1 << 60):
                far[other] = length + step
                heapq.heappush(queue, (far[other], other))
                pushed += 1
    return pushed


def prim_dense(weights: list[list[int]]) -> int:
    n = len(weights)
    near, todo, total = [1 << 30] * n, set(range(1, n)), 0
    last = 0
    while todo:
        best = -1
        for port in todo:
            if weights[last][port] < near[port]:
                near[port] = weights[last][port]
            if best < 0 or near[port] < near[best]:
                best = port
        total += near[best]
        todo.discard(best)
        last = best
    return total


def reached(links: list[list[int]]) -> int:
    seen, queue = {0}, [0]
    for port in queue:
        for other in links[port]:
            if other not in seen:
                seen.add(other)
                queue.append(other)
    return len(seen)


def joined(pairs: list[tuple[int, int]]) -> int:
    parent = list(range(len(pairs)))

    def top(port: int) -> int:
        while parent[port] != port:
            parent[port] = parent[parent[port]]
            port = parent[port]
        return port

    groups = len(pairs)
    for a, b in pairs:
        x, y = top(a), top(b)
        if x != y:
            parent[x] = y
            groups -= 1
    return groups


def coloured(links: list[list[int]]) -> int:
    colours: dict[int, int] = {}
    for port in range(len(links)):
        taken = set()
        for other in links[port]:
            if other in colours:
                taken.add(colours[other])
        colour = 0
        while colour in taken:
            colour += 1
        colours[port] = colour
    return max(colours.values(), default=0)


def triangles(joined_to: list[list[int]]) -> int:
    n, found = len(joined_to), 0
    for a in range(n):
        for b in range(a + 1, n):
            if joined_to[a][b]:
                for c in range(b + 1, n):
                    if joined_to[a][c] and joined_to[b][c]:
                        found += 1
    return found


def find_word(text: str, word: str) -> int:
    found = 0
    for i in range(len(text) - len(word) + 1):
        j = 0
        while j < len(word) and text[i + j] == word[j]:
            j += 1
        found += j == len(word)
    return found


def failure_table(text: str) -> list[int]:
    table, k = [0] * len(text), 0
    for i in range(1, len(text)):
        while k and text[i] != text[k]:
            k = table[k - 1]
        if text[i] == text[k]:
            k += 1
        table[i] = k
    return table


def palindromes(text: str) -> int:
    found = 0
    for i in range(len(text)):
        k = 0
        while i - k >= 0 and i + k < len(text) and text[i - k] == text[i + k]:
            found += 1
            k += 1
    return found


def common(first: str, second: str) -> int:
    row = [0] * (len(second) + 1)
    for a in first:
        before = 0
        for j, b in enumerate(second):
            kept = row[j + 1]
            row[j + 1] = before + 1 if a == b else max(row[j + 1], row[j])
            before = kept
    return row[-1]


def letters_tree(words: list[str]) -> int:
    root: dict = {}
    made = 0
    for word in words:
        node = root
        for letter in word:
            if letter not in node:
                node[letter] = {}
                made += 1
            node = node[letter]
    return made


def runs(text: str) -> int:
    found, last = 0, ""
    for letter in text:
        if letter != last:
            found += 1
            last = letter
    return found


def common_divisors(pairs: list[tuple[int, int]]) -> int:
    total = 0
    for a, b in pairs:
        while b:
            a, b = b, a % b
        total += a
    return total


def halve_or_triple(starts: list[int]) -> int:
    longest = 0
    for x in starts:
        k = 0
        while x > 1:
            x = x // 2 if x % 2 == 0 else 3 * x + 1
            k += 1
        longest = max(longest, k)
    return longest


def set_bits(numbers: list[int]) -> int:
    total = 0
    for x in numbers:
        while x:
            x &= x - 1
            total += 1
    return total


def hull(points: list[tuple[int, int]]) -> int:
    points = sorted(set(points))

    def side(points: list[tuple[int, int]]) -> list[tuple[int, int]]:
        out: list[tuple[int, int]] = []
        for p in points:
            while len(out) > 1:
                (ax, ay), (bx, by) = out[-2], out[-1]
                if (bx - ax) * (p[1] - ay) - (by - ay) * (p[0] - ax) > 0:
                    break
                out.pop()
            out.append(p)
        return out

    return len(side(points)) + len(side(points[::-1])) - 2


def overlaps(spans: list[tuple[int, int]]) -> int:
    spans = sorted(spans)
    found = 0
    for i in range(len(spans)):
        for j in range(i + 1, len(spans)):
            if spans[j][0] >= spans[i][1]:
                break
            found += 1
    return found


def front(points: list[tuple[int, int]]) -> list[tuple[int, int]]:
    kept: list[tuple[int, int]] = []
    for p in points:
        if any(q[0] >= p[0] and q[1] >= p[1] for q in kept):
            continue
        kept = [q for q in kept if not (p[0] >= q[0] and p[1] >= q[1])]
        kept.append(p)
    return kept


def best_stretch(gains: list[int]) -> int:
    best = here = 0
    for gain in gains:
        here += gain
        if here < 0:
            here = 0
        if here > best:
            best = here
    return best


def best_pair_stretch(gains: list[int]) -> int:
    best = 0
    for i in range(len(gains)):
        total = 0
        for j in range(i, len(gains)):
            total += gains[j]
            if total > best:
                best = total
    return best


def recent_only(calls: list[int], room: int) -> int:
    kept: dict[int, int] = {}
    missed = 0
    for when, port in enumerate(calls):
        if port not in kept:
            missed += 1
            if len(kept) >= room:
                oldest, least = -1, when
                for other, last in kept.items():
                    if last < least:
                        oldest, least = other, last
                del kept[oldest]
        kept[port] = when
    return missed


def served(arrivals: list[int], berths: int) -> int:
    free = [0] * berths
    waited = 0
    for time in sorted(arrivals):
        first = 0
        for k in range(1, berths):
            if free[k] < free[first]:
                first = k
        start = max(time, free[first])
        waited += start - time
        free[first] = start + 3
    return waited


def first_fit(loads: list[int], room: int) -> int:
    left: list[int] = []
    for load in loads:
        for k, space in enumerate(left):
            if space >= load:
                left[k] -= load
                break
        else:
            left.append(room - load)
    return len(left)


def stable_pairs(wishes: list[list[int]], ranks: list[list[int]]) -> int:
    n = len(wishes)
    held: list[int | None] = [None] * n
    asked = [0] * n
    free, proposals = list(range(n)), 0
    while free:
        crew = free.pop()
        ship = wishes[crew][asked[crew]]
        asked[crew] += 1
        proposals += 1
        other = held[ship]
        if other is None:
            held[ship] = crew
        elif ranks[ship][crew] < ranks[ship][other]:
            held[ship] = crew
            free.append(other)
        else:
            free.append(crew)
    return proposals


def neighbours_alive(rows: list[list[int]]) -> int:
    alive = 0
    for i in range(1, len(rows) - 1):
        for j in range(1, len(rows) - 1):
            if rows[i][j]:
                near = rows[i - 1][j] + rows[i + 1][j] + rows[i][j - 1] + rows[i][j + 1]
                if 1 < near < 4:
                    alive += 1
    return alive


def sparse_product(a: list[dict[int, int]], b: list[dict[int, int]]) -> int:
    made = 0
    for row in a:
        out: dict[int, int] = {}
        for k, x in row.items():
            for j, y in b[k].items():
                out[j] = out.get(j, 0) + x * y
                made += 1
    return made
