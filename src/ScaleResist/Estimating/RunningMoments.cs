// Mean and spread of a stream of samples, one at a time.

namespace ScaleResist.Estimating;

/// <summary>Mean and spread of independent samples (Welford 1962).</summary>
internal struct RunningMoments
{
    private double mean;
    private double spread;

    public readonly double Mean => mean;

    public int Count { get; private set; }

    /// <summary>Standard error of the mean.</summary>
    public readonly double StandardError => StandardErrorOf(Count);

    /// <summary>Standard error that the mean of so many samples is foreseen to have.</summary>
    public readonly double StandardErrorOf(int samples) => Math.Sqrt(spread / samples / (Count - 1));

    public void Add(double sample)
    {
        Count++;
        double step = sample - mean;
        mean += step / Count;
        spread += step * (sample - mean);
    }
}
