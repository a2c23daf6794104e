namespace WearWatch.Simulator.Best;

/// <summary>
/// Means over a trip of the samples as written, less everything that is known of them: what is left is the vehicle's own
/// straight running and the noise of driver, wind and sensors.
/// </summary>
public sealed class TripRemainder(SteeringSensors sensors)
{
    /// <summary>Memory of the driver's torque noise, 1 s of 10 Hz: variance of a mean is (1 + 0.9) ÷ (1 − 0.9) times that of as many independent samples.</summary>
    private const double TorqueMemory = 19;
    /// <summary>Standard deviation of the wind's torque share and its memory, rows (see Trip).</summary>
    private const double WindSd = 0.0895, WindMemory = 667;
    /// <summary>What linear laws between two wheel angles leave out, deg at the steering wheel and N·m.</summary>
    private const double AngleFloorDeg = 0.02, TorqueFloorNm = 0.01;

    private readonly int _angle = IndexOf(sensors, "steering_wheel_angle");
    private readonly int _torque = sensors.Kind == "torque" ? IndexOf(sensors, "driver_torque") : -1;
    private double _angleSum, _torqueSum, _windSum;
    private int _angles, _torques, _after;

    private static int IndexOf(SteeringSensors sensors, string name) => Array.FindIndex(sensors.Channels, c => c.Name == name);

    /// <param name="values">The samples of one moment.</param>
    /// <param name="after">Past the third of the trip at which a kerb would be struck.</param>
    /// <param name="knownAngleDeg">Part of the angle that bank and curve make.</param>
    /// <param name="knownTorqueNm">Part of the column's torque that is known; not a number where the torque tells nothing.</param>
    /// <param name="speed">m/s.</param>
    public void Row(ReadOnlySpan<double> values, bool after, double knownAngleDeg, double knownTorqueNm, double speed)
    {
        if (_angle < 0) return;
        _angleSum += AsWritten(values, _angle) - sensors.AngleZeroDeg - knownAngleDeg;
        _angles++;
        if (after) _after++;
        if (_torque < 0 || double.IsNaN(knownTorqueNm)) return;
        _torqueSum += (AsWritten(values, _torque) - sensors.TorqueZeroNm) * (1 + sensors.Boost) - knownTorqueNm;
        _windSum += speed * speed / 500;
        _torques++;
    }

    private double AsWritten(ReadOnlySpan<double> values, int channel)
    {
        var step = sensors.Channels[channel].Resolution;
        return Math.Round(values[channel] / step) * step;
    }

    /// <summary>The trip's means; null where there is too little of it.</summary>
    public TripMeans? Of(int day)
    {
        if (_angles < 300) return null;
        // Feedback on heading and offset leaves the noise no lasting mean: over T seconds it is the heading's change, 1.6 σ ÷ T.
        var angleSd = 2 * sensors.AngleNoiseDeg / (0.1 * _angles) + 0.02 * sensors.Channels[_angle].Resolution + AngleFloorDeg;
        double torque = double.NaN, torqueSd = double.NaN;
        if (_torques >= 300)
        {
            torque = _torqueSum / _torques;
            var noise = sensors.TorqueNoiseNm * sensors.TorqueNoiseNm * TorqueMemory / _torques;
            var t = _torques / WindMemory;
            var wind = Math.Pow(WindSd * _windSum / _torques, 2) * 2 / t * (1 - (1 - Math.Exp(-t)) / t);
            torqueSd = Math.Sqrt(noise + wind + TorqueFloorNm * TorqueFloorNm);
        }
        return new(day, _angleSum / _angles, angleSd, torque, torqueSd, (double)_after / _angles);
    }
}
