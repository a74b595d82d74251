package chain_test

import (
	"fmt"
	"math/rand/v2"

	"wend/modes/chain"
)

// The slowest bending mode of an actin-like filament in water near a wall.
func ExampleNewChain() {
	tempK := 25 + chain.ZeroCelsius
	c, err := chain.NewChain(chain.Options{
		LengthUm: 10, LpUm: 17, TempK: tempK,
		DragPaS: chain.DragNearWall(chain.WaterViscosity(tempK), 0.004, 1),
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	state := c.Equilibrium(rand.New(rand.NewPCG(1, 2)))
	var curve chain.Curve
	c.Curve(state, &curve)
	fmt.Printf("τ₁ %.2f s, var b₁ %.2f µm³, length %.1f µm\n", c.RelaxationS(1), c.Variance(1), curve.Length())
	// Output: τ₁ 0.51 s, var b₁ 1.18 µm³, length 10.0 µm
}

func ExampleBeamRoot() {
	fmt.Printf("%.6f\n", chain.BeamRoot(1))
	// Output: 4.730041
}
