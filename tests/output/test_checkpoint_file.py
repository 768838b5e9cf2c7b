"""Checkpoints: exact, kept in twos, any damage found, crashes survived, foreign ones refused."""

import time

import numpy as np
import pytest
from output.output_examples import kill, start

from swe.errors import FileError, InputError
from swe.output import checkpoint
from swe.output.checkpoint import newest, require, save

META = {"mesh_checksum": "a" * 64, "physics_key": "b" * 64, "time": 1234.1, "names": ["one", "zwölf"]}


def arrays(step: int) -> dict[str, np.ndarray]:
    generator = np.random.default_rng(step)
    return {
        "eta": generator.normal(size=30),
        "u": np.array([np.nan, -0.0, np.inf, 5e-324, 1 / 3]),
        "count": np.arange(3, dtype=np.int64),
        "wet": np.array([True, False]),
        "basis": generator.normal(size=(3, 4)).astype(np.float32),
        "nothing": np.zeros(0),
    }


def test_everything_comes_back_bit_for_bit(tmp_path):
    save(tmp_path, 7, arrays(7), META)
    found, skipped = newest(tmp_path)
    assert skipped == [] and found.step == 7 and found.meta == META
    assert set(found.arrays) == set(arrays(7))
    for name, array in arrays(7).items():
        assert found.arrays[name].dtype == array.dtype and found.arrays[name].shape == array.shape
        assert found.arrays[name].tobytes() == array.tobytes()


def test_the_last_two_are_kept(tmp_path):
    for step in (10, 20, 30, 40):
        save(tmp_path, step, arrays(step), META)
    assert sorted(item.name for item in tmp_path.iterdir()) == ["step-000000000030.checkpoint", "step-000000000040.checkpoint"]


def test_saving_the_same_step_again_keeps_the_one_before(tmp_path):
    for step in (10, 20, 20):
        save(tmp_path, step, arrays(step), META)
    assert [int(item.stem[5:]) for item in sorted(tmp_path.iterdir())] == [10, 20]


def test_a_run_that_went_back_removes_what_it_left_behind(tmp_path):
    for step in (10, 20):
        save(tmp_path, step, arrays(step), META)
    path = tmp_path / "step-000000000020.checkpoint"
    path.write_bytes(path.read_bytes()[:-1])
    assert newest(tmp_path)[0].step == 10
    save(tmp_path, 15, arrays(15), META)
    assert [int(item.stem[5:]) for item in sorted(tmp_path.iterdir())] == [10, 15]


def damages(content: bytes, generator: np.random.Generator):
    """Every damage of the two header lines, and 300 of each kind at random places."""
    header = len(content) - len(content.split(b"\n", 2)[2])
    for place in [*range(header), *generator.integers(len(content), size=300)]:
        flipped = bytearray(content)
        flipped[place] ^= 1 << int(generator.integers(8))
        yield f"bit flipped at {place}", bytes(flipped)
    for size in [*range(header), *generator.integers(len(content), size=300)]:
        yield f"cut at {size}", content[:size]
    for place in generator.integers(len(content), size=100):
        length = int(generator.integers(1, 64))
        yield f"hole at {place}", content[:place] + content[place + length :]
        zeros = content[:place] + bytes(length) + content[place + length :]
        if zeros != content:
            yield f"zeros at {place}", zeros
    yield "one byte more", content + b"\0"
    yield "twice", content + content


def test_any_damage_is_found_and_the_one_before_is_taken(tmp_path):
    save(tmp_path, 10, arrays(10), META)
    path = save(tmp_path, 20, arrays(20), META)
    content = path.read_bytes()
    tried = 0
    for what, damaged in damages(content, np.random.default_rng(11)):
        path.write_bytes(damaged)
        found, skipped = newest(tmp_path)
        assert found.step == 10, what
        assert len(skipped) == 1 and str(path) in skipped[0] and skipped[0].endswith("skipped"), what
        tried += 1
    assert tried > 1000
    path.write_bytes(content)
    assert newest(tmp_path)[0].step == 20


def test_the_reason_tells_cut_from_altered(tmp_path):
    path = save(tmp_path, 10, arrays(10), META)
    content = path.read_bytes()
    path.write_bytes(content[:-5])
    with pytest.raises(FileError, match=r"cut short: \d+ of \d+ bytes"):
        checkpoint.read(path)
    path.write_bytes(content[:-5] + b"12345")
    with pytest.raises(FileError, match="altered: the checksum is wrong"):
        checkpoint.read(path)


def test_no_sound_checkpoint_is_one_clear_line(tmp_path):
    with pytest.raises(FileError, match=r"no sound checkpoint to resume from \(found none\)"):
        newest(tmp_path / "absent")
    save(tmp_path, 10, arrays(10), META).write_bytes(b"")
    with pytest.raises(FileError, match="found 1 damaged: .*first line is damaged"):
        newest(tmp_path)


def test_another_mesh_or_other_physics_is_refused(tmp_path):
    save(tmp_path, 10, arrays(10), META)
    found, _ = newest(tmp_path)
    require(found, "a" * 64, "b" * 64)
    with pytest.raises(InputError, match=r"another mesh: it has mesh_checksum aaaaaaaaaaaa\.\.\., this case cccccccccccc\.\.\.;"):
        require(found, "c" * 64, "b" * 64)
    with pytest.raises(InputError, match="other physics"):
        require(found, "a" * 64, "c" * 64)


def test_what_cannot_be_kept_exactly_is_refused(tmp_path):
    with pytest.raises(ValueError, match="only numbers"):
        save(tmp_path, 1, {"names": np.array(["a"], dtype=object)}, META)
    with pytest.raises(ValueError, match="JSON"):
        save(tmp_path, 1, {}, META | {"time": float("nan")})
    assert list(tmp_path.iterdir()) == []


def test_leftovers_of_a_killed_writer_are_removed(tmp_path):
    (tmp_path / ".step-000000000010.checkpoint.99999.part").write_bytes(b"half")
    save(tmp_path, 20, arrays(20), META)
    assert [item.name for item in tmp_path.iterdir()] == ["step-000000000020.checkpoint"]


def test_a_file_in_place_of_the_folder(tmp_path):
    (tmp_path / "checkpoints").write_text("here first")
    with pytest.raises(FileError, match="making the checkpoint folder failed"):
        save(tmp_path / "checkpoints", 1, arrays(1), META)


WRITER = """
import sys
import numpy as np
from swe.output.checkpoint import save
step = 0
while True:
    step += 1
    save(sys.argv[1], step, {"eta": np.full(300_000, float(step))}, {})
    print(step, flush=True)
"""


def test_killed_writers_always_leave_a_sound_newest(tmp_path):
    """SIGKILL at ten random moments; what was reported as saved is there, or something newer."""
    generator = np.random.default_rng(3)
    for _ in range(10):
        writer = start(WRITER, tmp_path)
        writer.stdout.readline()
        time.sleep(float(generator.uniform(0, 0.03)))
        told = int(["1", *kill(writer)][-1])
        found, skipped = newest(tmp_path)
        assert skipped == [] and found.step >= told
        assert (found.arrays["eta"] == found.step).all()
        for item in tmp_path.iterdir():
            item.unlink()
