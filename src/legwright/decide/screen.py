"""Screening: very many candidates, each at its best size and doping on a coarse map, block by block."""

from __future__ import annotations

import csv
import hashlib
import io
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import ExitStack
from dataclasses import asdict, dataclass, fields
from importlib import import_module
from pathlib import Path
from typing import Any

import numpy as np
from scipy.stats import qmc

from legwright.base.errors import InputError
from legwright.base.files import write_by
from legwright.base.parts import Parts
from legwright.base.units import NM, PER_CM3
from legwright.base.version import VERSION
from legwright.candidate.family import Family
from legwright.candidate.library import load_candidate
from legwright.decide.brief import Brief
from legwright.decide.rank import doping_range, refusal, size_range
from legwright.decide.score import around, score
from legwright.leg.duty import SCORE_NAMES

#: candidates of a block: some seconds of work, so that little is lost and little is spent on sending
BLOCK = 64
#: the coarse map, then a finer one around its best point
_DOPINGS, _SIZES, _NODES, _FINER_NODES, _ROUNDS = 9, 13, 6, 9, 3


@dataclass(frozen=True)
class Screened:
    """One candidate as screening sees it, in trade units; score 0 where it cannot serve, and why."""

    candidate: str
    formula: str
    carrier: str
    score: float
    score_name: str
    size_nm: float | None
    doping_per_cm3: float | None
    flag: str


def members(family: Family, count: int) -> list[str]:
    """Names of `count` members, even along an alloy line of two ends, a Sobol net over one of three or more."""
    ends = family.data.end
    if len(ends) == 2:
        low, high = max(0.0, 1 - ends[0].most), ends[1].most
        return list(dict.fromkeys(f"{family.name}:{x:.6g}" for x in np.round(np.linspace(low, high, count), 6)))
    most = np.array([end.most for end in ends[1:]])
    net = qmc.Sobol(len(most), rng=np.random.default_rng(0))
    names: dict[str, None] = {}
    while len(names) < count:
        shares = np.round(net.random(1 << max(count, 16).bit_length()) * most, 6)
        first = 1 - shares.sum(axis=1)
        fits = (first >= -1e-12) & (first <= ends[0].most)
        names |= dict.fromkeys(f"{family.name}:{','.join(f'{x:.6g}' for x in row)}" for row in shares[fits])
    return list(names)[:count]


def screen_one(brief: Brief, name: str) -> Screened:
    """The best of a coarse map over doping and size, and of a finer one around it."""
    try:
        one = load_candidate(name)
    except InputError as error:
        return Screened(name, "", "", 0.0, SCORE_NAMES[brief.task.maximise], None, None, f"unreadable: {error}")
    duty, shape = brief.task, brief.size.shape
    refused, dopings = refusal(brief, one, duty), doping_range(brief, one)
    worth, size, doping = 0.0, None, None
    if refused is None and dopings is not None:
        density = np.geomspace(*dopings, _DOPINGS)
        length = np.geomspace(*size_range(brief, one), _SIZES)
        found = score(one, duty, density[:, None], length, shape, _NODES, _ROUNDS)
        i, j = np.unravel_index(int(np.argmax(found)), found.shape)
        density, length = around(density, int(i)), around(length, int(j))
        found = score(one, duty, density[:, None], length, shape, _FINER_NODES, _ROUNDS)
        i, j = np.unravel_index(int(np.argmax(found)), found.shape)
        worth = float(found[i, j])
        if worth > 0:
            size, doping = float(length[j]) / NM, float(density[i]) / PER_CM3
        else:
            refused = "duty-out-of-reach"
    why = refused or ("no-doping-range" if dopings is None else "")
    name_of_score = SCORE_NAMES[duty.maximise]
    return Screened(one.name, one.data.formula, one.data.carrier, worth, name_of_score, size, doping, why)


def _block(brief: Brief, names: Sequence[str]) -> str:
    """The rows of a block as CSV, the same bits wherever it is worked out."""
    from threadpoolctl import threadpool_limits

    with threadpool_limits(1):
        return _as_csv([asdict(screen_one(brief, name)) for name in names])


def _as_csv(rows: Iterable[dict[str, Any]]) -> str:
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    for row in rows:
        writer.writerow([repr(value) if isinstance(value, float) else value for value in row.values()])
    return text.getvalue()


@dataclass(frozen=True)
class Screening:
    """How a screening ended: candidates asked and done, the best of them, best first, and where all stand."""

    asked: int
    done: int
    best: tuple[Screened, ...]
    into: Path

    @property
    def complete(self) -> bool:
        """Whether every candidate was looked at."""
        return self.done == self.asked


def screen(
    brief: Brief,
    names: Sequence[str],
    into: Path,
    workers: int = 1,
    cluster: str | None = None,
    told: Callable[[int, int], None] = lambda done, asked: None,
    best: int = 10,
) -> Screening:
    """Every candidate into a CSV or Parquet file, in the order of `names`.

    Finished blocks stand in a folder beside the file until all are done: a run that was killed goes on from there,
    to the same bytes. `workers` processes of this machine, or those of a Dask `cluster` (its address, or "local"
    for workers of its own); the bytes do not depend on them. `told` hears candidates done and asked. An interrupt
    ends with the best so far. Raises InputError where the folder serves another question or another run, or a file
    cannot be written.
    """
    if into.suffix not in (".csv", ".parquet"):
        raise InputError(f"value '{into}' is not allowed; a name that ends in .csv or .parquet", key="--into")
    blocks = [names[k : k + BLOCK] for k in range(0, len(names), BLOCK)]
    question = "\n".join([VERSION, brief.model_dump_json(), str(BLOCK), *names])
    parts = Parts(into.with_name(f".{into.name}.parts"), hashlib.sha256(question.encode()).hexdigest())
    leading = _Leading(best)
    with parts.held():
        done = 0
        missing = []
        for number in range(len(blocks)):
            text = parts.read(number)
            if text is None:
                missing.append(number)
            else:
                done += len(blocks[number])
                leading.see(text)
        told(done, len(names))
        try:
            for number, text in _worked(brief, blocks, missing, workers, cluster):
                parts.write(number, text)
                leading.see(text)
                done += len(blocks[number])
                told(done, len(names))
        except KeyboardInterrupt:
            return Screening(len(names), done, leading.rows, into)
        _join(parts, len(blocks), into)
        parts.clear()
    return Screening(len(names), done, leading.rows, into)


class _Leading:
    """The best rows so far."""

    def __init__(self, count: int) -> None:
        self.count = count
        self.rows: tuple[Screened, ...] = ()

    def see(self, text: str) -> None:
        served = [row for row in _rows(text) if row.score > 0]
        self.rows = tuple(sorted([*self.rows, *served], key=lambda row: (-row.score, row.candidate))[: self.count])


def _rows(text: str) -> Iterator[Screened]:
    for name, formula, carrier, worth, score_name, size, doping, flag in csv.reader(io.StringIO(text)):
        yield Screened(
            name, formula, carrier, float(worth), score_name,
            float(size) if size else None, float(doping) if doping else None, flag,
        )  # fmt: skip


def _worked(
    brief: Brief, blocks: Sequence[Sequence[str]], missing: Sequence[int], workers: int, cluster: str | None
) -> Iterator[tuple[int, str]]:
    """Blocks as they are done, by this process, by processes of this machine or by a cluster's."""
    if workers == 1 and cluster is None:
        for number in missing:
            yield number, _block(brief, blocks[number])
        return
    from joblib import Parallel, delayed, parallel_config

    def numbered(number: int) -> Any:
        return delayed(_numbered)(brief, number, blocks[number])

    with ExitStack() as held:
        if cluster is not None:
            held.enter_context(_client(cluster, workers))
            held.enter_context(parallel_config(backend="dask"))
        run = Parallel(n_jobs=-1 if cluster else workers, return_as="generator_unordered")
        yield from run(numbered(number) for number in missing)


def _numbered(brief: Brief, number: int, names: Sequence[str]) -> tuple[int, str]:
    return number, _block(brief, names)


def _client(cluster: str, workers: int) -> Any:
    try:
        distributed: Any = import_module("distributed")
    except ImportError as error:
        raise InputError(
            "needs the extra 'scale': pip install 'legwright[scale]'", key="--cluster", slug="missing-extra"
        ) from error
    if cluster != "local":
        try:
            return distributed.Client(cluster, timeout=10)
        except (OSError, ValueError) as error:
            raise InputError(f"no cluster answers at '{cluster}'", key="--cluster") from error
    own = distributed.LocalCluster(n_workers=workers, threads_per_worker=1, processes=True, dashboard_address=None)
    return distributed.Client(own)


def _join(parts: Parts, count: int, into: Path) -> None:
    texts = (parts.read(number) or "" for number in range(count))
    if into.suffix == ".parquet":
        _join_parquet(texts, into)
        return

    def write(path: Path) -> None:
        with path.open("w", encoding="utf-8", newline="") as stream:
            stream.write(",".join(field.name for field in fields(Screened)) + "\n")
            stream.writelines(texts)

    write_by(into, write)


def _join_parquet(texts: Iterable[str], into: Path) -> None:
    try:
        import pyarrow as pa
        import pyarrow.parquet as pq
    except ImportError as error:
        raise InputError(
            "needs the extra 'scale': pip install 'legwright[scale]'", key="--into", slug="missing-extra"
        ) from error
    numbers = {"score", "size_nm", "doping_per_cm3"}
    schema = pa.schema([(f.name, pa.float64() if f.name in numbers else pa.string()) for f in fields(Screened)])

    def write(path: Path) -> None:
        with pq.ParquetWriter(path, schema) as writer:
            for text in texts:
                writer.write_table(pa.Table.from_pylist([asdict(row) for row in _rows(text)], schema=schema))

    write_by(into, write)
