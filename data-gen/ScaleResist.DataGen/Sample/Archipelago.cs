// The invented sample: the dew-water mains of the Drowsing Isles of Umberwhistle. No such place exists.
// Invariant: always the same rows; a test compares them with the files under data-gen/samples.

using ScaleResist.DataGen.Networks;

namespace ScaleResist.DataGen.Sample;

internal static class Archipelago
{
    private const ulong Seed = 0x0B5E_55ED;
    private const ulong Stream = 9;

    public static Scenario Build()
    {
        Scenario scenario = new();
        SeededRandom random = new(Seed, Stream);

        Island lum = new(scenario, random, "LUM");
        string[,] lumpenglow = lum.Town("Lumpenglow", 30, 26);
        string[,] yawnhaven = lum.Town("Yawnhaven", 14, 11);
        lum.Join(lum.Coast(lumpenglow[25, 29], 38, "Pillow Shore"), yawnhaven[0, 0], lum.Rural());
        lum.Join(lum.Coast(lumpenglow[0, 29], 27, "Quilt Strand"), yawnhaven[0, 13], lum.Rural());
        string[,] hiccup = lum.Village(lumpenglow[25, 0], 17, "Little Hiccup", 5, 4);
        string[,] mumble = lum.Village(yawnhaven[10, 7], 9, "Upper Mumble", 6, 5);
        string[,] sockdrift = lum.Village(lumpenglow[12, 0], 24, "Sockdrift", 4, 4);
        string lumWorks = lum.Station("works", "First Moonwell", lumpenglow[0, 15], lumpenglow[0, 16]);
        string lumWorks2 = lum.Station("works", "Second Moonwell", yawnhaven[0, 7], yawnhaven[0, 8]);

        Island gri = new(scenario, random, "GRI");
        string[,] gribblefen = gri.Town("Gribblefen", 23, 21);
        string[,] teacosy = gri.Town("Teacosy Cross", 10, 9);
        gri.Join(gri.Coast(gribblefen[20, 22], 44, "Crumpet Sands"), teacosy[0, 0], gri.Rural());
        string[,] wobble = gri.Village(teacosy[8, 9], 13, "Old Wobble", 5, 5);
        string[,] buttonhush = gri.Village(gribblefen[20, 0], 21, "Buttonhush", 6, 4);
        string[,] creaksby = gri.Village(gribblefen[8, 22], 8, "Creaksby Puddle", 4, 3);
        string griWorks = gri.Station("works", "Third Moonwell", gribblefen[0, 11], gribblefen[0, 12]);

        Island tat = new(scenario, random, "TAT");
        string[,] tattersnook = tat.Town("Tattersnook", 19, 18);
        string[,] doze = tat.Village(tattersnook[17, 18], 19, "Dozing Magna", 7, 5);
        string[,] murkle = tat.Village(doze[4, 6], 16, "Murkle End", 5, 4);
        tat.Join(tat.Coast(murkle[3, 4], 31, "Mitten Cliffs"), tattersnook[17, 0], tat.Rural());
        string[,] nettle = tat.Village(tattersnook[0, 18], 12, "Nettle-on-Yawn", 5, 3);

        Island ott = new(scenario, random, "OTT");
        string[,] ottlewhim = ott.Town("Ottlewhim", 17, 15);
        string[,] grumble = ott.Village(ottlewhim[14, 16], 28, "Grumble Parva", 6, 6);
        string[,] thimble = ott.Village(ottlewhim[14, 0], 14, "Thimblemew", 4, 4);
        string ottWorks = ott.Station("works", "Fourth Moonwell", ottlewhim[0, 8], ottlewhim[0, 9]);

        Island pim = new(scenario, random, "PIM");
        string[,] pimmerglass = pim.Town("Pimmerglass", 15, 13);
        string[,] pinch = pim.Village(pimmerglass[12, 14], 35, "Pinchwhistle", 5, 5);

        Island sno = new(scenario, random, "SNO");
        string[,] snoremoor = sno.Town("Snoremoor", 13, 11);
        string[,] flump = sno.Village(snoremoor[10, 12], 11, "Flumpwick", 5, 4);
        string[,] drizzle = sno.Village(flump[3, 4], 7, "Drizzle Stump", 3, 3);

        // Sea mains. Snoremoor hangs on one; the others have two ways at least.
        string lumEast = lum.Station("landing", "Bobbin Pier", lumpenglow[6, 29], lumpenglow[7, 29]);
        string lumSouth = lum.Station("landing", "Kettle Pier", yawnhaven[10, 0], yawnhaven[10, 1]);
        string griWest = gri.Station("landing", "Spindle Pier", gribblefen[6, 0], gribblefen[7, 0]);
        string griSouth = gri.Station("landing", "Ladle Pier", teacosy[8, 0], teacosy[8, 1]);
        string tatNorth = tat.Station("landing", "Whisker Pier", tattersnook[0, 9], tattersnook[0, 10]);
        string tatEast = tat.Station("landing", "Slipper Pier", tattersnook[9, 18], tattersnook[10, 18]);
        string ottWest = ott.Station("landing", "Mothball Pier", ottlewhim[7, 0], ottlewhim[8, 0]);
        string ottSouth = ott.Station("landing", "Humbug Pier", ottlewhim[14, 8], ottlewhim[14, 9]);
        string pimNorth = pim.Station("landing", "Tassel Pier", pimmerglass[0, 7], pimmerglass[0, 8]);
        string snoWest = sno.Station("landing", "Snuffle Pier", snoremoor[5, 0], snoremoor[6, 0]);
        lum.Join(lumEast, griWest, 24.5m);
        lum.Join(lumSouth, tatNorth, 15.2m);
        gri.Join(griSouth, ottWest, 11.8m);
        tat.Join(tatEast, ottWest, 9.6m);
        tat.Join(tatEast, pimNorth, 6.4m);
        ott.Join(ottSouth, pimNorth, 7.3m);
        ott.Join(ottSouth, snoWest, 3.9m);

        // Two outposts with moonwells of their own, joined to nobody.
        Island far = new(scenario, random, "FAR");
        string[,] farspoon = far.Town("Farspoon", 4, 3, "outpost");
        Island net = new(scenario, random, "NET");
        string[,] nethercandle = net.Town("Nethercandle", 3, 2, "outpost");
        net.Coast(nethercandle[1, 2], 3, "Wick Rock");

        // What the records of a real utility hold too: mains listed twice (once in the other direction) and one that ends where it starts.
        lum.Join(lumpenglow[0, 14], lumpenglow[0, 15], 12.5m);
        gri.Join(griWest, lumEast, 18m);
        ott.Join(ottlewhim[3, 3], ottlewhim[3, 3], 2.2m);

        scenario.Pairs.AddRange(
        [
            (lumWorks, lumpenglow[25, 0]), (lumWorks, lumpenglow[25, 29]), (lumWorks, yawnhaven[10, 13]), (lumWorks, hiccup[3, 4]),
            (lumWorks, sockdrift[3, 3]), (lumWorks2, mumble[4, 5]), (lumWorks2, yawnhaven[10, 0]), (lumWorks, lumWorks2),
            (griWorks, gribblefen[20, 0]), (griWorks, gribblefen[20, 22]), (griWorks, wobble[4, 4]), (griWorks, buttonhush[3, 5]),
            (griWorks, creaksby[2, 3]), (griWorks, teacosy[8, 9]), (lumWorks, griWorks), (lumWorks2, griWorks),
            (griWorks, ottWorks), (lumWorks, ottWorks), (ottWorks, ottlewhim[14, 0]), (ottWorks, grumble[5, 5]),
            (ottWorks, thimble[3, 3]), (ottWorks, pimmerglass[12, 14]), (ottWorks, pinch[4, 4]), (ottWorks, snoremoor[10, 12]),
            (ottWorks, drizzle[2, 2]), (ottWorks, flump[3, 4]), (lumWorks2, tattersnook[0, 0]), (lumWorks2, doze[4, 6]),
            (lumWorks2, murkle[3, 4]), (lumWorks2, nettle[2, 4]), (lumEast, griWest), (lumSouth, tatNorth),
            (griSouth, ottWest), (tatEast, pimNorth), (ottSouth, snoWest), (lumpenglow[0, 0], lumpenglow[0, 1]),
            (gribblefen[10, 10], gribblefen[11, 10]), (hiccup[0, 0], drizzle[0, 0]), (lumWorks, farspoon[0, 0]), (farspoon[0, 0], nethercandle[0, 0]),
        ]);

        scenario.Works.AddRange(
        [
            new("W01", "lose", lumEast, griWest, null),
            new("W02", "lose", lumSouth, tatNorth, null),
            new("W03", "lose", ottSouth, snoWest, null),
            new("W04", "lose", lumpenglow[0, 14], lumpenglow[0, 15], null),
            new("W05", "lose", griSouth, ottWest, null),
            new("W05", "lose", tatEast, ottWest, null),
            new("W06", "lose", lumWorks, lumpenglow[0, 15], null),
            new("W07", "add", snoWest, pimmerglass[12, 0], 5.5m),
            new("W08", "add", hiccup[3, 0], sockdrift[3, 0], 1.5m),
            new("W09", "add", grumble[5, 0], thimble[3, 0], 2m),
            new("W10", "add", farspoon[0, 0], griWest, 4m),
            new("W11", "set", tatEast, pimNorth, 19.2m),
            new("W12", "set", lumEast, griWest, 60m),
            new("W12", "set", griSouth, ottWest, 30m),
        ]);
        return scenario;
    }
}
