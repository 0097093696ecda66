package trace

import (
	"context"
	"math"
	"sync"
	"sync/atomic"

	"pavilight/facets"
)

// Door is one tier of the stone, or one side of a stone without tiers, and the light
// that leaves by its facets: who sends the light to the eye, and who leaks it. What is
// followed from the eye stands for light that comes the other way, so by the crown's
// doors light has come in.
type Door struct {
	Tier     string // or the side's word where there are no tiers
	Side     facets.Side
	Returned float64 // share of the viewing rays that leaves here upward, past the head
	Head     float64 // upward, within the head
	Leaked   float64 // downward

	ReturnedError, HeadError, LeakedError float64 // standard errors
}

// doorRays is how many sample points of each scrambling Doors follows.
const doorRays = 2048

// Doors tells for one of the scene's surroundings by which tiers the light leaves, in
// the order in which the stone's facets name them. The sums of the doors are the
// ledger's returned, head and leaked.
func Doors(ctx context.Context, scene Scene, column int, settings Settings) ([]Door, error) {
	settings.Pixels = 1
	scene.Surroundings = scene.Surroundings[column : column+1]
	r, err := newRun(scene, settings)
	if err != nil {
		return nil, err
	}
	t := scene.traveller(0, settings, r.tracer)
	r.symmetry, r.images = nil, 1

	// By scrambling and facet; each scrambling is one worker's at a time.
	var shares [scramblings][]share
	var rays [scramblings]float64
	var next atomic.Int64
	var workers sync.WaitGroup
	for range min(r.settings.Workers, scramblings) {
		workers.Go(func() {
			for ctx.Err() == nil {
				k := int(next.Add(1)) - 1
				if k >= scramblings {
					return
				}
				shares[k], rays[k] = r.doors(t, k)
			}
		})
	}
	workers.Wait()
	if ctx.Err() != nil {
		return nil, context.Cause(ctx)
	}

	var doors []Door
	place := map[string]int{}
	of := make([]int, len(scene.Stone.Facets))
	for i, f := range scene.Stone.Facets {
		name := f.Tier
		if name == "" {
			name = f.Side.String()
		}
		if _, ok := place[name]; !ok {
			place[name] = len(doors)
			doors = append(doors, Door{Tier: name, Side: f.Side})
		}
		of[i] = place[name]
	}
	for d := range doors {
		mean := func(q Quantity) (value, standardError float64) {
			var means [scramblings]float64
			for k := range means {
				for i, at := range of {
					if at == d {
						means[k] += shares[k][i][q] / rays[k]
					}
				}
				value += means[k] / scramblings
			}
			for _, m := range means {
				standardError += (m - value) * (m - value)
			}
			return value, math.Sqrt(standardError / (scramblings * (scramblings - 1)))
		}
		doors[d].Returned, doors[d].ReturnedError = mean(Returned)
		doors[d].Head, doors[d].HeadError = mean(Head)
		doors[d].Leaked, doors[d].LeakedError = mean(Leaked)
	}
	return doors, nil
}

// doors follows the first points of one scrambling and returns what left by each facet,
// and how many rays met the stone, each counted by its weight.
func (r *run) doors(t *traveller, scrambling int) (shares []share, rays float64) {
	shares = make([]share, len(r.scene.Stone.Facets))
	points := r.points[scrambling]
	var at lambda
	var s scratch
	for i := range uint32(doorRays) {
		e, _, _, ok := r.enter(points, i, &s)
		if !ok {
			continue
		}
		t.look(e.wavelength, r.scene.Material, &at)
		var none sums
		one := make([]share, len(shares))
		t.sendBy(int(e.facet), e.at, e.along, &at, newDice(points, i, 0), &none, one)
		for f := range one {
			for q := range one[f] {
				shares[f][q] += e.xyz[1] * one[f][q]
			}
		}
		rays += e.xyz[1]
	}
	return shares, rays
}
