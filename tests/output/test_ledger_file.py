"""ledger.nc: conventions, blocks, resuming."""

import netCDF4
import numpy as np
import pytest
import xarray
from output.output_examples import START, attributes, compliance, ledger_block, plane, write_ledger

from swe.errors import FileError
from swe.output.catalogue import ledger_quantities
from swe.output.ledger import LedgerFile

TIMES = np.arange(0.0, 1500 * 60.0, 60.0)  # more than two chunks


def test_cf_checker_finds_nothing(tmp_path):
    assert compliance(write_ledger(tmp_path / "ledger.nc", plane(), TIMES)) == []


def test_columns_come_back_with_units(tmp_path):
    with xarray.open_dataset(write_ledger(tmp_path / "ledger.nc", plane(), TIMES)) as dataset:
        for name, column in ledger_block(TIMES).items():
            assert np.array_equal(dataset[name].values, column)
            assert dataset[name].attrs["units"] == ledger_quantities()[name].units


def test_resuming_equals_an_unbroken_file(tmp_path):
    whole = write_ledger(tmp_path / "whole.nc", plane(), TIMES)
    path = write_ledger(tmp_path / "ledger.nc", plane(), TIMES[:700])
    with LedgerFile.open_for_append(path, TIMES[599]) as file:
        assert (file.dropped, file.count) == (100, 600)
        file.append(TIMES[600:], ledger_block(TIMES[600:]))
    with netCDF4.Dataset(whole) as one, netCDF4.Dataset(path) as other:
        for name in one.variables:
            assert np.array_equal(one[name][:], other[name][:])


def test_a_ledger_must_be_complete(tmp_path):
    with LedgerFile.create(tmp_path / "ledger.nc", START, attributes(plane())) as file:
        with pytest.raises(ValueError, match="the ledger wants mass_anomaly"):
            file.append([0.0], {"mass_anomaly": [1.0]})
        with pytest.raises(ValueError, match="for 2 times"):
            file.append([0.0, 1.0], ledger_block([0.0]))
        assert file.count == 0


def test_resuming_a_fields_file_cut_in_half_is_refused(tmp_path):
    path = write_ledger(tmp_path / "ledger.nc", plane(), TIMES)
    content = path.read_bytes()
    path.write_bytes(content[: len(content) // 2])
    with pytest.raises(FileError, match="cannot be read as a record file"):
        LedgerFile.open_for_append(path, 0.0)
