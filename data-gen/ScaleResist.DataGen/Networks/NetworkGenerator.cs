// The one entry to every family. Links stream into a sink; nothing holds them here.
// Invariant: what is sent is exactly what FamilyPlan.TrySize promised.

namespace ScaleResist.DataGen.Networks;

/// <summary>Takes links as they are drawn.</summary>
public interface ILinkSink
{
    /// <summary>Takes one link between two 0-based node numbers.</summary>
    void Link(long source, long target, double conductance);
}

/// <summary>Generates networks.</summary>
public static class NetworkGenerator
{
    /// <summary>Streams the network of a plan into the sink, each undirected link once.</summary>
    /// <returns>The nodes and links of the network.</returns>
    /// <exception cref="ArgumentException">The plan is wrong; ask <see cref="FamilyPlan.TrySize"/> first.</exception>
    public static NetworkSize Generate(FamilyPlan plan, ILinkSink sink, CancellationToken cancel = default)
    {
        if (!plan.TrySize(out NetworkSize size, out string? problem))
            throw new ArgumentException(problem, nameof(plan));
        Emitter emitter = new(plan, sink, cancel);
        Draw(plan, size, emitter);
        if (emitter.Count != size.Links)
            throw new InvalidOperationException($"{emitter.Count} links were drawn where {size.Links} were promised.");
        return size;
    }

    private static void Draw(FamilyPlan plan, NetworkSize size, Emitter emitter)
    {
        switch (plan.Family)
        {
            case Family.Path:
                Lattices.Path(size.Nodes, emitter);
                break;
            case Family.Cycle:
                Lattices.Path(size.Nodes, emitter);
                emitter.Link(size.Nodes - 1, 0);
                break;
            case Family.Star:
                Lattices.Star(size.Nodes, emitter);
                break;
            case Family.Complete:
                Lattices.Complete(size.Nodes, emitter);
                break;
            case Family.Grid:
                Lattices.Grid(size.Nodes, closed: false, emitter);
                break;
            case Family.Torus:
                Lattices.Grid(size.Nodes, closed: true, emitter);
                break;
            case Family.Cube:
                Lattices.Cube(size.Nodes, emitter);
                break;
            case Family.Hypercube:
                Lattices.Hypercube(size.Nodes, emitter);
                break;
            case Family.Ladder:
                Lattices.Ladder(size.Nodes, emitter);
                break;
            case Family.Road:
                RoadNetwork.Draw(size.Nodes, plan.Seed, emitter);
                break;
            case Family.Preferential:
                Attachment.Preferential(size, plan.Seed, emitter);
                break;
            case Family.PowerLaw:
                RandomNetworks.PowerLaw(size, plan.Seed, emitter);
                break;
            case Family.SmallWorld:
                RandomNetworks.SmallWorld(size.Nodes, plan.Reach, plan.Seed, emitter);
                break;
            case Family.Fringe:
                Attachment.Fringe(plan.Core, size.Nodes, plan.Seed, emitter);
                break;
            default:
                throw new InvalidOperationException($"No generator for {plan.Family}.");
        }
    }
}

/// <summary>Gives each link its conductance, counts it, and passes it on.</summary>
internal sealed class Emitter(FamilyPlan plan, ILinkSink sink, CancellationToken cancel)
{
    private readonly double decades = plan.Decades;
    private readonly ulong seed = plan.Seed;

    public long Count { get; private set; }

    public void Link(long source, long target)
    {
        if ((Count++ & 0xFFFF) == 0)
            CheckCancelled();
        sink.Link(source, target, Conductances.Of(seed, source, target, decades));
    }

    public void CheckCancelled() => cancel.ThrowIfCancellationRequested();
}
