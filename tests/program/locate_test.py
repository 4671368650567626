"""stanchion locate and check --locate: causes, exit codes, options, damaged tables."""

import unittest

from program import ProgramTest, chain, diagonal


class LocateTest(ProgramTest):
    def specimen(self, name, unknowns, *options):
        folder = self.folder / f"{name}{unknowns}{''.join(options).replace('-', '')}"
        run = self.run_program("specimen", name, "--unknowns", unknowns, *options, "--out", folder, "--quiet")
        self.assertEqual(run.returncode, 0, run.stderr)
        return folder

    def locate(self, code, folder, *options, command="locate"):
        return self.expect(code, *command.split(), folder / "K.mtx", "--dofs", folder / "dofs.csv", "--nodes",
                           folder / "nodes.csv", *options)

    def test_sound_model(self):
        document = self.locate(0, self.specimen("solid", 600), "--mass", self.folder / "solid600" / "M.mtx")
        self.assertEqual(document["command"], "locate")
        self.assertEqual(document["directions"], [])
        self.assertEqual(len(document["components"]), 1)
        self.assertGreaterEqual(document["local_accuracy"]["largest"], document["local_accuracy"]["typical"])
        # The block is 8 x 4 x 4 m of concrete; the clamped face is struck with its share of the mass.
        self.assertLess(document["mass"]["total"][0], 8 * 4 * 4 * 2500)
        self.assertGreater(document["mass"]["total"][0], 0.7 * 8 * 4 * 4 * 2400)
        self.assertAlmostEqual(document["mass"]["centre"][1], 2, places=6)
        self.assertEqual(len(document["components"][0]["rigid_energy"]), 6)

    def test_loose_part(self):
        folder = self.specimen("frame", 600, "--fault", "loose-part")
        document = self.locate(1, folder)
        (direction,) = document["directions"]
        self.assertEqual((direction["kind"], direction["sign"], direction["count"]), ("loose_part", 0, 6))
        self.assertEqual(len(direction["motions"]), 6)
        self.assertLessEqual(sum(node["share"] for node in direction["nodes"]), 1 + 1e-9)
        self.assertEqual(sum(part["nullity"] for part in document["components"]), 6)
        for word in ("pivot",):
            text = self.run_program("locate", folder / "K.mtx", "--dofs", folder / "dofs.csv").stdout
            self.assertNotIn(word, text.split("Where and why")[1].split("stiffness K")[0])

    def test_check_with_locate_keeps_the_exit_code_of_check(self):
        folder = self.specimen("solid", 600, "--fault", "hinge")
        document = self.locate(1, folder, command="check --locate")
        self.assertEqual(document["directions"][0]["kind"], "mechanism")
        self.locate(0, folder, "--expect", "zero:1", command="check --locate")
        soft = self.specimen("solid", 600, "--fault", "soft-spring")
        self.assertEqual(self.locate(0, soft, command="check --locate")["directions"][0]["kind"], "near_mechanism")
        self.locate(1, soft)

    def test_the_rest_is_counted(self):
        document = self.expect(1, "locate", self.matrix("K.mtx", 40, diagonal([-1.0] * 10 + [0.0] * 5 + [1.0] * 25)),
                               "--most", "4")
        self.assertLessEqual(len(document["directions"]), 4)
        shown = sum(direction["count"] for direction in document["directions"])
        self.assertEqual(shown + document["location"]["not_located"], 15)

    def test_directions_that_a_coarse_resolution_calls_zero_are_not_passed_over(self):
        for fault in ("none", "negative-spring"):
            folder = self.specimen("plate", 1000, "--fault", fault)
            document = self.locate(3, folder, "--resolution", "1e-2")
            self.assertGreater(document["inertia"]["zero"], 0)
            self.assertEqual(sum(d["count"] for d in document["directions"] if d["sign"] == 0), document["inertia"]["zero"])
            self.assertEqual({d["kind"] for d in document["directions"]}, {"unresolved"})
            for direction in document["directions"]:
                self.assertEqual("--resolution" in direction["remedy"], direction["sign"] == 0)

    def test_weak_level(self):
        folder = self.specimen("solid", 600, "--fault", "soft-spring")
        self.assertEqual(self.locate(0, folder, "--weak-below", "1e-15")["directions"], [])

    def test_free_chain_without_maps(self):
        document = self.expect(1, "locate", self.matrix("K.mtx", 50, chain(50, held=0)))
        (direction,) = document["directions"]
        self.assertEqual((direction["kind"], direction["count"]), ("loose_part", 1))
        self.assertEqual(direction["nodes"][0]["node"], None)

    def test_load_past_critical(self):
        folder = self.specimen("plate", 600)
        document = self.locate(1, folder, "--add", f"{folder / 'G.mtx'}:60")
        self.assertEqual({direction["kind"] for direction in document["directions"]}, {"unstable_as_a_whole"})
        self.assertGreater(document["inertia"]["negative"], 0)

    def test_unusable_tables_are_left_out(self):
        folder = self.specimen("solid", 600, "--fault", "loose-part")
        (folder / "dofs.csv").write_text("equation,node,dof\n1,7,ux\n")
        (folder / "nodes.csv").unlink()
        document = self.locate(1, folder)
        self.assertEqual({warning["code"] for warning in document["warnings"]} & {"dof-map-unusable", "nodes-unusable"},
                         {"dof-map-unusable", "nodes-unusable"})
        self.assertEqual(sum(direction["count"] for direction in document["directions"]), 6)

    def test_bad_options(self):
        path = self.matrix("K.mtx", 5, chain(5))
        for options in (["--most", "0"], ["--most", "1001"], ["--weak-below", "2"], ["--attention-digits", "13"],
                        ["--alarm-digits", "17"]):
            self.expect_failure(2, "out-of-range", "locate", path, *options)
        self.expect_failure(2, "contradiction", "locate", path, "--precision", "extended")
        self.expect_failure(2, "contradiction", "check", path, "--locate", "--precision", "extended")

    def test_memory_cap_holds_for_the_kept_factor(self):
        folder = self.specimen("solid", 20000)
        self.expect_failure(4, "memory-cap", "locate", folder / "K.mtx", "--memory-cap", "60M")


if __name__ == "__main__":
    unittest.main()
